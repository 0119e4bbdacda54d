"""Pages of the samples app: one module a page."""
