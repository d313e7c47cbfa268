"""The pure show: what is written, what happens when, and in which order. No files, clocks, threads."""
