"""Places and trivial programs for the tests of the stack."""

import shutil
import sys
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from config.stack import database
from config.stack.children import Program

PATIENT = "import time; time.sleep(600)"


@pytest.fixture
def place(monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """A state folder whose parents the database's account can pass; what root keeps elsewhere goes there too."""
    folder = Path(tempfile.mkdtemp(prefix="siltwatch-test-"))
    folder.chmod(0o711)
    monkeypatch.setattr(database, "SHARED_ROOT", folder)
    monkeypatch.setenv("SILTWATCH_STATE", str(folder / "state"))
    (folder / "state").mkdir()
    yield folder / "state"
    shutil.rmtree(folder)


@pytest.fixture
def python(tmp_path: Path) -> Callable[..., Program]:
    """Builds a program from a line of Python, for example python("a", "import time; time.sleep(9)")."""

    def build(name: str, code: str = PATIENT, **more: object) -> Program:
        log = tmp_path / f"{name}.log"
        return Program(name, (sys.executable, "-c", code), {}, tmp_path, log, **more)  # type: ignore[arg-type]  # as given

    return build
