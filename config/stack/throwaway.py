"""Servers for one errand: a database and a broker in a temporary folder, gone afterwards."""

import contextlib
import os
import re
import secrets
import shutil
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from config.stack.broker import Broker, start_broker
from config.stack.database import start_database, throwaway_database
from config.stack.folders import private_folder
from config.stack.supervisor import Supervisor

PREFIX = "siltwatch-errand-"


@dataclass(frozen=True)
class Servers:
    folder: Path
    database_url: str
    redis_url: str

    def environment(self) -> dict[str, str]:
        """What Django needs to use them. Nothing here is secret or kept."""
        static = private_folder(self.folder / "static")
        return {
            "DATABASE_URL": self.database_url,
            "REDIS_URL": self.redis_url,
            "DJANGO_SETTINGS_MODULE": "config.settings",
            "SILTWATCH_SECRET_KEY": secrets.token_urlsafe(64),
            "SILTWATCH_DEBUG": "0",
            "SILTWATCH_PLAIN_HTTP": "1",
            "SILTWATCH_STATIC_ROOT": str(static),
        }


@contextlib.contextmanager
def throwaway_servers() -> Iterator[Servers]:
    """Start what the environment does not already name; stop and remove it at the end."""
    _sweep()
    folder = Path(tempfile.mkdtemp(prefix=f"{PREFIX}{os.getpid()}-"))
    folder.chmod(0o711)  # the database's account passes through; what lies inside is private
    try:
        with Supervisor(lambda line: None) as supervisor:
            yield Servers(folder, _database_url(supervisor, folder), _redis_url(supervisor, folder))
    finally:
        shutil.rmtree(folder, ignore_errors=True)


def _database_url(supervisor: Supervisor, folder: Path) -> str:
    if url := os.environ.get("DATABASE_URL"):
        return url
    database = throwaway_database(folder, folder / "database.log")
    start_database(supervisor, database)
    return database.url


def _redis_url(supervisor: Supervisor, folder: Path) -> str:
    if url := os.environ.get("REDIS_URL"):
        return url
    broker = Broker(folder / "broker", folder / "broker.log", keeps=False)
    start_broker(supervisor, broker)
    return broker.url


def _sweep() -> None:
    """Remove folders whose errand was killed before it could."""
    for path in Path(tempfile.gettempdir()).glob(f"{PREFIX}*"):
        found = re.match(rf"{PREFIX}(\d+)-", path.name)
        if found and path.lstat().st_uid == os.geteuid() and not _lives(int(found[1])):
            shutil.rmtree(path, ignore_errors=True)


def _lives(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    except PermissionError:
        pass
    return True
