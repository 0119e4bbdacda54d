"""Static files in production: hashed, and compressed so that a browser reads back what was put in."""

import gzip
from pathlib import Path

import brotli  # type: ignore[import-untyped]  # it carries no types
import pytest
from django.core.management import call_command
from pytest_django import Settings


@pytest.fixture
def collected(settings: Settings, tmp_path: Path) -> Path:
    settings.STATIC_ROOT = tmp_path
    settings.STORAGES = settings.STORAGES | {"staticfiles": {"BACKEND": "config.static_storage.HashedStaticStorage"}}
    call_command("collectstatic", "--no-input", "--verbosity", "0")
    return tmp_path


def test_every_compressed_script_reads_back_as_the_script(collected: Path) -> None:
    scripts = sorted(collected.glob("plotly.min.*.js"))
    assert len(scripts) == 1
    plain = scripts[0].read_bytes()
    assert brotli.decompress(Path(f"{scripts[0]}.br").read_bytes()) == plain
    assert gzip.decompress(Path(f"{scripts[0]}.gz").read_bytes()) == plain
