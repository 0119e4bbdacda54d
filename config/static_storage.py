"""Static files under hashed names, compressed once: brotli at its top setting takes a quarter of a minute for the chart
script and saves an eighth of it."""

import brotli  # type: ignore[import-untyped]  # it carries no types
from whitenoise.compress import Compressor  # type: ignore[import-untyped]  # nor does whitenoise
from whitenoise.storage import CompressedManifestStaticFilesStorage  # type: ignore[import-untyped]

BROTLI_QUALITY = 5


class QuickCompressor(Compressor):  # type: ignore[misc]  # untyped base
    @staticmethod
    def compress_brotli(data: bytes) -> bytes:
        return bytes(brotli.compress(data, quality=BROTLI_QUALITY))


class HashedStaticStorage(CompressedManifestStaticFilesStorage):  # type: ignore[misc]  # untyped base
    def create_compressor(self, **options: object) -> Compressor:
        return QuickCompressor(**options)
