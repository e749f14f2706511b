"""What happens to every request before and after a view."""
