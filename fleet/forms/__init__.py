"""What people fill in about the register."""
