"""The private broker: a Valkey server on one Unix socket, speaking the Redis protocol."""

import signal
import socket
import time
from dataclasses import dataclass
from pathlib import Path
from urllib.parse import quote

from config.stack.binaries import valkey_server
from config.stack.children import Program
from config.stack.errors import StackError
from config.stack.folders import private_folder, socket_folder
from config.stack.supervisor import Supervisor

READY_SECONDS = 30.0


@dataclass(frozen=True)
class Broker:
    """`keeps`: messages are written to disk as they come; a throwaway broker forgets them."""

    folder: Path
    log: Path
    keeps: bool

    @property
    def socket(self) -> Path:
        return socket_folder(self.folder) / "broker.sock"

    @property
    def url(self) -> str:
        return f"unix://{quote(str(self.socket))}?db=0"

    def server(self) -> Program:
        options = {
            "--port": "0",
            "--unixsocket": str(self.socket),
            "--unixsocketperm": "700",
            "--dir": str(self.folder),
            "--appendonly": "yes" if self.keeps else "no",
            "--save": "",
            "--maxmemory-policy": "noeviction",
            "--loglevel": "warning",
        }
        argv = (str(valkey_server()), *(part for option in options.items() for part in option))
        return Program("the broker", argv, {"LANG": "C.UTF-8"}, self.folder, self.log, death_signal=signal.SIGTERM)


def start_broker(supervisor: Supervisor, broker: Broker) -> None:
    private_folder(broker.folder)
    broker.socket.unlink(missing_ok=True)
    child = supervisor.start(broker.server())
    deadline = time.monotonic() + READY_SECONDS
    while not _answers(broker.socket):
        if child.ended() is not None or time.monotonic() > deadline:
            raise StackError(f"The broker did not start.{child.last_words()}")
        time.sleep(0.05)


def _answers(path: Path) -> bool:
    try:
        with socket.socket(socket.AF_UNIX, socket.SOCK_STREAM) as connection:
            connection.settimeout(1.0)
            connection.connect(str(path))
            connection.sendall(b"PING\r\n")
            return connection.recv(64).startswith(b"+PONG")
    except OSError:
        return False
