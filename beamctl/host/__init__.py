"""Composition root: player, journal, engine process and the links between processes."""
