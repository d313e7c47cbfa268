"""The pure show: what is written, what happens when, in which order. No files, clocks, threads."""
