"""Where samples go: a device, a file, or nowhere."""
