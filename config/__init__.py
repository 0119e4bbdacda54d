"""The project's settings, addresses and the processes around them. It names all three apps; none of them imports it."""

from config.celery import app as celery_app

__all__ = ["celery_app"]
