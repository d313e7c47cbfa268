"""Show folder to model, and back. Reading never changes a file."""
