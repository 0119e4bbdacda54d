"""Pages of the register and the board."""
