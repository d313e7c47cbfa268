"""What the desk itself can do, by the screen it belongs to; none of it asks the player."""
