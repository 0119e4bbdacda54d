"""A pytest plugin, loaded before Django's settings: a database, a broker and a mail server for this run alone.

`-p tests.servers` in pyproject.toml names it. With DATABASE_URL or REDIS_URL set, that server is used instead.
"""

import contextlib
import os
from collections.abc import Generator

import pytest

from config.stack.throwaway import throwaway_servers
from tests.smtp_sink import SmtpSink

SWEEP_SECONDS = "2"
STUCK_SECONDS = "3"

running = contextlib.ExitStack()
sink_key = pytest.StashKey[SmtpSink]()


@pytest.hookimpl(wrapper=True)
def pytest_load_initial_conftests(early_config: pytest.Config) -> Generator[None]:
    """A wrapper, so that it comes before pytest-django reads the settings."""
    servers = running.enter_context(throwaway_servers())
    sink = SmtpSink()
    running.callback(sink.stop)
    early_config.stash[sink_key] = sink
    os.environ.update(servers.environment())
    os.environ.update(
        SILTWATCH_URL="http://testserver",
        SILTWATCH_SWEEP_SECONDS=SWEEP_SECONDS,
        SILTWATCH_DELIVERY_STUCK_SECONDS=STUCK_SECONDS,
        SILTWATCH_SMTP_HOST=sink.host,
        SILTWATCH_SMTP_PORT=str(sink.port),
        SILTWATCH_SMTP_TLS="0",
    )
    try:
        return (yield)
    except BaseException:
        running.close()
        raise


@pytest.hookimpl(trylast=True)
def pytest_unconfigure() -> None:
    running.close()
