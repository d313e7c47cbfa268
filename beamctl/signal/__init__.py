"""Programme to envelope: preparing sounds once, and the laws and filters that run live."""
