"""`make run`: the whole of Siltwatch on this machine, from the database to the mail catcher."""

import contextlib
import json
import os
import signal
import socket
import time
from pathlib import Path

from config.stack.addresses import bind_address, listen, wait_for_health, wanted_port
from config.stack.application import Application, fresh_logs, prepare
from config.stack.broker import Broker, start_broker
from config.stack.database import kept_database, start_database
from config.stack.errors import StackError
from config.stack.folders import Lock, private_folder, secret_key, state_folder
from config.stack.supervisor import Supervisor

FIRST_MAIL_PORT = 8025


def say(line: str) -> None:
    print(line, flush=True)


def run() -> int:
    """Start everything, print the address, stay until asked to stop; 0 after a wanted stop."""
    for number in (signal.SIGTERM, signal.SIGHUP):
        if signal.getsignal(number) is not signal.SIG_IGN:  # nohup's wish is kept
            signal.signal(number, signal.default_int_handler)
    state = state_folder()
    lock = Lock.take(state)
    try:
        with Supervisor(say) as supervisor:
            _serve(supervisor, state, lock)
    except KeyboardInterrupt:
        say("Siltwatch has stopped.")
    finally:
        _environment_file(state).unlink(missing_ok=True)
    return 0


def running_environment() -> dict[str, str]:
    """The variables of the Siltwatch that runs from this state folder now, for commands beside it."""
    state = state_folder()
    path = _environment_file(state)
    if not Lock.held(state) or not path.exists():
        raise StackError("Siltwatch is not running: start it with `make run`, then try again in another terminal.")
    kept: dict[str, str] = json.loads(path.read_text())
    return kept


def _serve(supervisor: Supervisor, state: Path, lock: Lock) -> None:
    begun, first_port = time.monotonic(), wanted_port()
    logs = fresh_logs(state)
    settings = _start_servers(supervisor, state, logs) | _settings(state)
    prepare(supervisor, Application(state, logs, os.environ | settings))
    with contextlib.ExitStack() as sockets:
        web_socket = sockets.enter_context(listen(first_port, bind_address()))
        if mail_socket := _mail_socket():
            sockets.enter_context(mail_socket)
        settings |= _addresses(web_socket, mail_socket)
        application = Application(state, logs, os.environ | settings)
        _keep_environment(state, settings)
        _start_application(supervisor, application, web_socket, mail_socket)
        lock.note(f"process {os.getpid()}, {application.env['SILTWATCH_URL']}")
        _greet(application, _port(web_socket), mail_socket is not None, time.monotonic() - begun)
        supervisor.watch()


def _start_application(
    supervisor: Supervisor, application: Application, web_socket: socket.socket, mail_socket: socket.socket | None
) -> None:
    if mail_socket:
        supervisor.start(application.mailbox(mail_socket))
    web = supervisor.start(application.web(web_socket))
    supervisor.start(application.worker())
    supervisor.start(application.beat())
    wait_for_health(_port(web_socket), web, application.env["SILTWATCH_HOSTS"].split(",")[0])


def _start_servers(supervisor: Supervisor, state: Path, logs: Path) -> dict[str, str]:
    servers = {}
    if not os.environ.get("DATABASE_URL"):
        say("Starting PostgreSQL …")
        database = kept_database(state, logs / "database.log")
        start_database(supervisor, database)
        servers["DATABASE_URL"] = database.url
    if not os.environ.get("REDIS_URL"):
        broker = Broker(state / "broker", logs / "broker.log", keeps=True)
        start_broker(supervisor, broker)
        servers["REDIS_URL"] = broker.url
    return servers


def _settings(state: Path) -> dict[str, str]:
    """What Django needs beside the servers; a value that the operator has set stays."""
    wanted = {
        "DJANGO_SETTINGS_MODULE": "config.settings",
        "SILTWATCH_SECRET_KEY": secret_key(state),
        "SILTWATCH_PLAIN_HTTP": "1",
        "SILTWATCH_URL": f"http://localhost:{wanted_port()}",
        "SILTWATCH_HOSTS": "localhost,127.0.0.1,[::1]",
        "SILTWATCH_STATIC_ROOT": str(private_folder(state / "static")),
        "PYTHONUNBUFFERED": "1",
    }
    return {name: os.environ.get(name) or value for name, value in wanted.items()}


def _addresses(web_socket: socket.socket, mail_socket: socket.socket | None) -> dict[str, str]:
    """What the ports decide, once they are held."""
    url = os.environ.get("SILTWATCH_URL") or f"http://localhost:{_port(web_socket)}"
    if mail_socket is None:
        return {"SILTWATCH_URL": url}
    smtp = {"HOST": "127.0.0.1", "PORT": str(_port(mail_socket)), "TLS": "0"}
    return {"SILTWATCH_URL": url} | {f"SILTWATCH_SMTP_{name}": value for name, value in smtp.items()}


def _port(listens: socket.socket) -> int:
    port: int = listens.getsockname()[1]
    return port


def _mail_socket() -> socket.socket | None:
    """None where a mail server is named, or no port is free: the catcher is an extra."""
    if os.environ.get("SILTWATCH_SMTP_HOST"):
        return None
    try:
        return listen(FIRST_MAIL_PORT, "127.0.0.1")
    except StackError as error:
        say(f"Mails are not caught: {error}")
        return None


def _environment_file(state: Path) -> Path:
    return state / "environment.json"


def _keep_environment(state: Path, settings: dict[str, str]) -> None:
    path = _environment_file(state)
    path.unlink(missing_ok=True)
    with os.fdopen(os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600), "w") as file:
        json.dump(settings, file)


def _greet(application: Application, port: int, catches_mail: bool, seconds: float) -> None:
    say(f"\nSiltwatch is ready after {seconds:.0f} s: {application.env['SILTWATCH_URL']}")
    if port != wanted_port():
        say(f"(Port {wanted_port()} is taken, so it listens on {port}.)")
    if logins := application.logins():
        say(f"\n{logins}")
    if catches_mail:
        say(f"\nMails go nowhere; they are kept in {application.mail}")
    say(f"Logs: {application.logs}\nStop with Ctrl-C.")
