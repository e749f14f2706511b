"""Forms check shape and range and return finished types; they save nothing."""
