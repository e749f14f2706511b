"""The app's configuration."""

from django.apps import AppConfig


class ClinicConfig(AppConfig):
    """Ebbline's one app."""

    name = "clinic"
    default_auto_field = "django.db.models.BigAutoField"
