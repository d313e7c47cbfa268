"""What will happen: the field of a beam over the room, its second beams, and what they cost."""
