"""Ebbline's engine: pure functions over columns of visits. No Django, no clock, no database."""

ENGINE_VERSION = "0.2.0"
