"""Where the web server and the mail catcher listen, and whether the first answers."""

import errno
import http.client
import os
import socket
import time

from config.stack.children import Child
from config.stack.errors import StackError

FIRST_PORT = 8000
PORTS_TRIED = 100
BACKLOG = 512
READY_SECONDS = 90.0


def bind_address() -> str:
    return os.environ.get("SILTWATCH_BIND", "127.0.0.1")


def wanted_port() -> int:
    text = os.environ.get("SILTWATCH_PORT") or os.environ.get("PORT") or str(FIRST_PORT)
    if not text.isdecimal() or not 1 <= int(text) <= 65_535:
        raise StackError(f"SILTWATCH_PORT is {text!r}; it must be a number from 1 to 65535.")
    return int(text)


def listen(first: int, host: str) -> socket.socket:
    """A socket that listens on the first free port from `first` upwards, for a child to inherit.

    Whoever holds it has the port: between choosing one and serving on it nobody else can take it.
    """
    last = min(first + PORTS_TRIED - 1, 65_535)
    for port in range(first, last + 1):
        try:
            return socket.create_server((host, port), backlog=BACKLOG)
        except OSError as error:
            if error.errno not in {errno.EADDRINUSE, errno.EACCES}:
                raise StackError(f"Nothing can listen on {host}: {error.strerror or error}.") from error
    raise StackError(f"No free port from {first} to {last} on {host}.")


def health(port: int, host: str = "localhost", secure: bool = False) -> int:
    """The status that /healthz/ answers with on this machine, 0 when nothing answers."""
    headers = {"Host": host} | ({"X-Forwarded-Proto": "https"} if secure else {})
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=5)
    try:
        connection.request("GET", "/healthz/", headers=headers)
        return connection.getresponse().status
    except (OSError, http.client.HTTPException):
        return 0
    finally:
        connection.close()


def wait_for_health(port: int, web: Child, host: str = "localhost") -> None:
    deadline = time.monotonic() + READY_SECONDS
    while (status := health(port, host)) != http.client.OK:
        if web.ended() is not None:
            raise StackError(f"The web server ended.{web.last_words()}")
        if time.monotonic() > deadline:
            raise StackError(f"The web server does not answer well (status {status}).{web.last_words()}")
        time.sleep(0.1)
