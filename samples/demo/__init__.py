"""The made-up plant that a new database is filled with: Fernhollow Board Mill. Nothing here is real."""
