"""The commands of the command line, one a file."""
