"""The account the database runs under: PostgreSQL refuses to run as root."""

import os
import pwd
import shutil
import subprocess
from dataclasses import dataclass

from config.stack.errors import StackError

NAME = "siltwatch-db"


@dataclass(frozen=True)
class Account:
    uid: int
    gid: int


def database_account() -> Account | None:
    """None for an ordinary user, who runs the database as himself; for root a system account, made when missing."""
    if os.geteuid() != 0:
        return None
    try:
        entry = pwd.getpwnam(NAME)
    except KeyError:
        _create()
        entry = pwd.getpwnam(NAME)
    return Account(entry.pw_uid, entry.pw_gid)


def _create() -> None:
    useradd = shutil.which("useradd", path=os.environ.get("PATH", "") + ":/usr/sbin:/sbin")
    if useradd is None:
        raise StackError(
            f"PostgreSQL does not run as root, and there is no useradd to make the account {NAME}: "
            "make it, or run as an ordinary user."
        )
    made = subprocess.run(
        [
            useradd,
            "--system",
            "--user-group",
            "--no-create-home",
            "--home-dir",
            "/nonexistent",
            "--shell",
            "/usr/sbin/nologin",
            NAME,
        ],
        capture_output=True,
        text=True,
        check=False,
    )
    if made.returncode != 0:
        raise StackError(f"The account {NAME} for the database could not be made: {made.stderr.strip()}")
