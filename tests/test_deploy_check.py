"""Django's own deployment checks have nothing to say about production settings."""

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
# Longer than 50 characters and of more than 5 kinds, as the check asks; it guards nothing.
KEY = "for-a-test-only-0123456789-abcdefghijklmnopqrstuvwxyz-ABCDEFGH"


def check(**variables: str) -> subprocess.CompletedProcess[str]:
    ours = ("SILTWATCH_", "DJANGO_")
    kept = {name: value for name, value in os.environ.items() if not name.startswith(ours)}
    command = [sys.executable, "manage.py", "check", "--deploy", "--fail-level", "INFO"]
    return subprocess.run(command, cwd=ROOT, env=kept | variables, capture_output=True, text=True, check=False)


def test_production_settings_pass_the_deployment_checks() -> None:
    done = check(SILTWATCH_SECRET_KEY=KEY)
    assert done.stdout + done.stderr == "System check identified no issues (0 silenced).\n"
    assert done.returncode == 0


def test_a_short_secret_key_is_noticed() -> None:
    assert "security.W009" in check(SILTWATCH_SECRET_KEY="short").stderr


def test_without_a_secret_key_nothing_starts() -> None:
    done = check()
    assert done.returncode != 0
    assert "SILTWATCH_SECRET_KEY is not set" in done.stderr
