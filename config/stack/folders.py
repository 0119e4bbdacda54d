"""Folders: the state that outlives a start, and private places for sockets."""

import fcntl
import hashlib
import os
import secrets
import stat
import tempfile
from dataclasses import dataclass
from pathlib import Path
from typing import IO

from config.stack.accounts import Account
from config.stack.errors import StackError
from config.stack.leash import ON_LINUX

CHECKOUT = Path(__file__).resolve().parent.parent.parent
SOCKET_NAME_ROOM = len("/.s.PGSQL.5432")
SOCKET_PATH_LIMIT = 107 if ON_LINUX else 103


def state_folder() -> Path:
    return private_folder(Path(os.environ.get("SILTWATCH_STATE") or CHECKOUT / ".run").expanduser().absolute())


def private_folder(path: Path, mode: int = 0o700, account: Account | None = None) -> Path:
    path.mkdir(mode=mode, parents=True, exist_ok=True)
    path.chmod(mode)
    if account:
        os.chown(path, account.uid, account.gid)
    return path


def digest(path: Path) -> str:
    return hashlib.sha256(str(path.resolve()).encode()).hexdigest()[:12]


def socket_folder(wanted: Path) -> Path:
    """The wanted folder, or a short private one in its place when a socket's path in it would be too long."""
    if len(os.fsencode(wanted)) + SOCKET_NAME_ROOM <= SOCKET_PATH_LIMIT:
        return private_folder(wanted)
    short = Path(tempfile.gettempdir()).resolve() / f"siltwatch-{os.geteuid()}-{digest(wanted)}"
    short.mkdir(mode=0o700, exist_ok=True)
    facts = short.lstat()
    if not stat.S_ISDIR(facts.st_mode) or facts.st_uid != os.geteuid() or facts.st_mode & 0o077:
        raise StackError(f"{short} belongs to someone else: remove it, or set SILTWATCH_STATE to a shorter path.")
    return short


def secret_key(state: Path) -> str:
    """The secret key of this installation, made at the first start and kept readable for its owner only."""
    path = state / "secret_key"
    if not path.exists():
        fresh = path.with_suffix(".new")
        fresh.unlink(missing_ok=True)
        with os.fdopen(os.open(fresh, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600), "w") as file:
            file.write(secrets.token_urlsafe(64))
        fresh.rename(path)
    return path.read_text()


@dataclass
class Lock:
    """Held while a supervisor runs on a state folder; the kernel lets go of it when the holder dies."""

    file: IO[str]

    @classmethod
    def take(cls, state: Path) -> "Lock":
        file = (state / "lock").open("a+")
        try:
            fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError as error:
            file.seek(0)
            raise StackError(f"Siltwatch already runs from {state} ({file.read().strip() or 'starting'}).") from error
        lock = cls(file)
        lock.note(f"process {os.getpid()}")
        return lock

    @classmethod
    def held(cls, state: Path) -> bool:
        """Whether a supervisor runs on this folder now."""
        try:
            cls.take(state).file.close()
        except StackError:
            return True
        return False

    def note(self, text: str) -> None:
        self.file.truncate(0)
        self.file.write(text + "\n")
        self.file.flush()
