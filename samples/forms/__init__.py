"""What people fill in about samples."""
