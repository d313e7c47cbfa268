"""Rows: what stands on the pages, as pure text and roles."""
