"""The command line of the stack: `run` serves, the others help beside it."""

import argparse
import os
import signal
import socket
import subprocess
import sys
from pathlib import Path

from environs import Env

from config.stack import mailbox
from config.stack.addresses import health
from config.stack.children import Program
from config.stack.errors import StackError
from config.stack.folders import CHECKOUT
from config.stack.leash import follow_parent
from config.stack.running import run, running_environment
from config.stack.supervisor import Supervisor
from config.stack.throwaway import throwaway_servers


def main(arguments: list[str]) -> int:
    options = _parser().parse_args(arguments)
    Env().read_env(str(CHECKOUT / ".env"))
    try:
        code: int = options.do(options)
    except StackError as error:
        print(error, file=sys.stderr)
        return 1
    except KeyboardInterrupt:
        return 130
    return code


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="python -m config.stack", description=__doc__)
    commands = parser.add_subparsers(required=True)
    command = commands.add_parser("run", help="serve Siltwatch with its own database and broker")
    command.add_argument("--with-parent", action="store_true", help="stop when the process that started this one ends")
    command.set_defaults(do=_run)
    command = commands.add_parser("exec", help="run a command beside throwaway servers")
    command.add_argument("words", nargs=argparse.REMAINDER, metavar="-- COMMAND …")
    command.set_defaults(do=_exec)
    command = commands.add_parser("manage", help="run a manage.py command against the Siltwatch that runs now")
    command.add_argument("words", nargs=argparse.REMAINDER, metavar="COMMAND …")
    command.set_defaults(do=_manage)
    command = commands.add_parser("mailbox", help="catch mail and keep it as files")
    command.add_argument("--host", default="127.0.0.1")
    command.add_argument("--port", type=int, default=8025)
    command.add_argument("--socket", type=int, help="the number of an inherited socket that listens already")
    command.add_argument("--folder", type=Path, required=True)
    command.set_defaults(do=_mailbox)
    command = commands.add_parser("health", help="succeed when the web server on this machine answers well")
    command.add_argument("--port", type=int, default=8000)
    command.set_defaults(do=_health)
    return parser


def _run(options: argparse.Namespace) -> int:
    if options.with_parent:
        follow_parent()
    return run()


def _exec(options: argparse.Namespace) -> int:
    signal.signal(signal.SIGTERM, signal.default_int_handler)
    words = options.words[1:] if options.words[:1] == ["--"] else options.words
    if not words:
        raise StackError("exec needs a command: python -m config.stack exec -- COMMAND …")
    with throwaway_servers() as servers, Supervisor(print) as supervisor:
        child = supervisor.start(Program(words[0], tuple(words), os.environ | servers.environment(), Path.cwd()))
        return child.process.wait()


def _manage(options: argparse.Namespace) -> int:
    env = os.environ | running_environment()
    return subprocess.run([sys.executable, "manage.py", *options.words], env=env, cwd=CHECKOUT, check=False).returncode


def _mailbox(options: argparse.Namespace) -> int:
    if options.socket is None:
        listens = socket.create_server((options.host, options.port))
    else:
        listens = socket.socket(fileno=options.socket)
    with listens:
        mailbox.serve(listens, options.folder)
    return 0


def _health(options: argparse.Namespace) -> int:
    host = os.environ.get("SILTWATCH_HOSTS", "localhost").split(",")[0]
    return 0 if health(options.port, host, secure=True) == 200 else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
