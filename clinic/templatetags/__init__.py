"""Template filters and what every page is given."""
