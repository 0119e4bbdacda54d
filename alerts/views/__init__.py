"""Pages of the alerts app: one module a noun."""
