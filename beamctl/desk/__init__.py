"""The terminal interface: shows snapshots, posts actions, and owns no state of the show."""
