"""Serves the chart script from the plotly wheel's own package data: no copy in the tree and no CDN."""

from collections.abc import Iterator
from typing import Any

from django.conf import settings
from django.contrib.staticfiles.finders import BaseFinder
from django.core.files.storage import FileSystemStorage

NAME = "plotly.min.js"


class ChartScriptFinder(BaseFinder):
    """Finds exactly one file, so that the rest of the wheel's package data is never published."""

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.storage = FileSystemStorage(location=settings.PLOTLY_SCRIPT.parent)

    def check(self, **kwargs: Any) -> list[Any]:
        return []

    def find(self, path: str, find_all: bool = False, **kwargs: Any) -> Any:
        found = str(settings.PLOTLY_SCRIPT) if path == NAME else None
        if find_all:
            return [found] if found else []
        return found or []

    def list(self, ignore_patterns: Any) -> Iterator[tuple[str, FileSystemStorage]]:
        yield NAME, self.storage
