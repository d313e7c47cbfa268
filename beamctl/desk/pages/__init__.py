"""Pages: what fills the terminal, and what its keys do there."""
