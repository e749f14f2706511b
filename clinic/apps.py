"""The app's configuration."""

from django.apps import AppConfig
from django.db.models.signals import post_migrate


class ClinicConfig(AppConfig):
    """Ebbline's one app."""

    name = "clinic"
    default_auto_field = "django.db.models.BigAutoField"

    def ready(self) -> None:
        """Connect the triggers and the system checks."""
        from clinic import checks, triggers

        checks.register_all()
        post_migrate.connect(triggers.after_migrate, sender=self)
