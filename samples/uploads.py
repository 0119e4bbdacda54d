"""An upload that is too large is dropped while it arrives, so that it takes neither memory nor disk."""

from __future__ import annotations

from typing import Any

from django.core.files.uploadhandler import FileUploadHandler, StopUpload


class SizeGuard(FileUploadHandler):
    """Stops reading behind `most_bytes`; the rest is read past, so that the browser gets its answer."""

    def __init__(self, most_bytes: int) -> None:
        super().__init__()
        self.most_bytes = most_bytes
        self.received = 0
        self.tripped = False

    def receive_data_chunk(self, raw_data: bytes, start: int) -> bytes:
        self.received += len(raw_data)
        if self.received > self.most_bytes:
            self.tripped = True
            raise StopUpload(connection_reset=False)
        return raw_data

    def file_complete(self, file_size: int) -> Any:
        return None
