"""What is measured, one file each."""
