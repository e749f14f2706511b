"""Date and number formats: ISO dates only, whatever the language."""
