"""`make run`: the whole of Siltwatch on this machine, from the database to the mail catcher."""

import json
import os
import signal
import time
from pathlib import Path

from config.stack.addresses import bind_address, free_port, wait_for_health, wanted_port
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
    begun = time.monotonic()
    logs = fresh_logs(state)
    servers = _start_servers(supervisor, state, logs)
    prepare(supervisor, Application(state, logs, os.environ | _settings(state, wanted_port(), 0) | servers))
    # Ports are chosen as late as can be: another start may be looking for one too.
    host, port, mail_port = bind_address(), free_port(wanted_port(), bind_address()), _mail_port()
    settings = _settings(state, port, mail_port) | servers
    application = Application(state, logs, os.environ | settings)
    _keep_environment(state, settings)
    if mail_port:
        private_folder(state / "mail")
        supervisor.start(application.mailbox(mail_port))
    web = supervisor.start(application.web(host, port))
    supervisor.start(application.worker())
    supervisor.start(application.beat())
    wait_for_health(port, web, application.env["SILTWATCH_HOSTS"].split(",")[0])
    lock.note(f"process {os.getpid()}, {application.env['SILTWATCH_URL']}")
    _greet(application, mail_port, port, time.monotonic() - begun)
    supervisor.watch()


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


def _settings(state: Path, port: int, mail_port: int) -> dict[str, str]:
    """What Django needs beyond the servers; a value that the operator has set stays."""
    wanted = {
        "DJANGO_SETTINGS_MODULE": "config.settings",
        "SILTWATCH_SECRET_KEY": secret_key(state),
        "SILTWATCH_PLAIN_HTTP": "1",
        "SILTWATCH_URL": f"http://localhost:{port}",
        "SILTWATCH_HOSTS": "localhost,127.0.0.1,[::1]",
        "SILTWATCH_STATIC_ROOT": str(private_folder(state / "static")),
        "PYTHONUNBUFFERED": "1",
    }
    settings = {name: os.environ.get(name) or value for name, value in wanted.items()}
    if mail_port:
        settings |= {
            "SILTWATCH_SMTP_HOST": "127.0.0.1",
            "SILTWATCH_SMTP_PORT": str(mail_port),
            "SILTWATCH_SMTP_TLS": "0",
        }
    return settings


def _mail_port() -> int:
    return 0 if os.environ.get("SILTWATCH_SMTP_HOST") else free_port(FIRST_MAIL_PORT, "127.0.0.1")


def _environment_file(state: Path) -> Path:
    return state / "environment.json"


def _keep_environment(state: Path, settings: dict[str, str]) -> None:
    path = _environment_file(state)
    path.unlink(missing_ok=True)
    with os.fdopen(os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600), "w") as file:
        json.dump(settings, file)


def _greet(application: Application, mail_port: int, port: int, seconds: float) -> None:
    say(f"\nSiltwatch is ready after {seconds:.0f} s: {application.env['SILTWATCH_URL']}")
    if port != wanted_port():
        say(f"(Port {wanted_port()} is taken, so it listens on {port}.)")
    if logins := application.logins():
        say(f"\n{logins}")
    else:
        say("\nPeople are added with: .venv/bin/python -m config.stack manage add_person NAME --role administrator")
    if mail_port:
        say(f"\nMails go nowhere; they are kept in {application.state / 'mail'}")
    say(f"Logs: {application.logs}\nStop with Ctrl-C.")
