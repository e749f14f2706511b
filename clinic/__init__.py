"""Ebbline's Django project and its one app: the clinic's log, list and report."""

__version__ = "0.2.0"
