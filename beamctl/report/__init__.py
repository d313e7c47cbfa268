"""What a venue files after a show: a journal told as text, as a table, and as a picture."""
