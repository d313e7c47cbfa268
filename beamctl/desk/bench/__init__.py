"""What is done on the Bench: a trial aim, its field, and what becomes of it."""
