"""Prints: frozen content in, bytes out. Nothing here asks a database or knows a model."""
