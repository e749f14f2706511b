"""Files in and out: the intake of past visits, and the invented demo clinic."""
