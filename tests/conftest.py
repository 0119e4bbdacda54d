"""Fixtures that more than one part of the tests needs. The servers behind them come from tests/servers.py."""

import os
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING
from urllib.parse import quote

import pytest
import redis
from django.conf import settings as django_settings
from django.db import connection, connections
from pytest_django import Settings
from pytest_django.live_server_helper import LiveServer

from fleet import catalogue
from fleet.models import Measurand
from tests.servers import sink_key
from tests.smtp_sink import SmtpSink
from tests.worker_process import CeleryProcess, Worker

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

CHROMIUM_NAMES = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable")
CHROMIUM_FLAGS = [
    *("--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-dev-shm-usage"),
    *("--disable-background-networking", "--disable-component-update", "--disable-sync"),
]


def pytest_configure() -> None:
    """Static files are served from where they lie: the tests collect none."""
    plain = {"BACKEND": "django.contrib.staticfiles.storage.StaticFilesStorage"}
    django_settings.STORAGES = {**django_settings.STORAGES, "staticfiles": plain}


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Tests with the real worker come last: once it runs it takes every message, also those a test wants to count."""
    items.sort(key=lambda item: item.get_closest_marker("worker") is not None)


@pytest.fixture
def smtp_sink(pytestconfig: pytest.Config, settings: Settings) -> Iterator[SmtpSink]:
    """The mail server, emptied; mails of this process go to it over SMTP for the length of the test."""
    sink = pytestconfig.stash[sink_key]
    sink.clear()
    settings.EMAIL_BACKEND = "django.core.mail.backends.smtp.EmailBackend"
    yield sink
    sink.clear()


@pytest.fixture
def broker() -> Iterator["redis.Redis"]:
    """A client of the tests' broker, emptied before and after."""
    with redis.Redis.from_url(django_settings.REDIS_URL) as client:
        client.flushdb()
        yield client
        client.flushdb()


@pytest.fixture(scope="session")
def worker_environment(django_db_setup: None) -> dict[str, str]:
    """The variables of a process that works on the tests' own database, not on the one beside it."""
    facts = connection.settings_dict
    login = quote(facts["USER"], safe="") + (":" + quote(facts["PASSWORD"], safe="") if facts["PASSWORD"] else "")
    place = f"{quote(facts['HOST'], safe='')}:{facts['PORT'] or 5432}"
    return os.environ | {"DATABASE_URL": f"postgres://{login}@{place}/{facts['NAME']}", "PYTHONUNBUFFERED": "1"}


@pytest.fixture(scope="session")
def _worker_process(worker_environment: dict[str, str], tmp_path_factory: pytest.TempPathFactory) -> Iterator[Worker]:
    client = redis.Redis.from_url(django_settings.REDIS_URL)
    process = Worker(worker_environment, tmp_path_factory.mktemp("worker") / "worker.log", client)
    yield process
    process.kill()
    client.close()


@pytest.fixture
def committed_rows(transactional_db: None) -> None:
    """A database that the test really commits to, with the shipped measurands, which an earlier flush took away."""
    catalogue.load(Measurand)


@pytest.fixture
def worker(committed_rows: None, broker: "redis.Redis", _worker_process: Worker) -> Iterator[Worker]:
    """A real worker on the tests' database, with the rows that migrations make. It lives on between tests unless one
    leaves it busy or kills it."""
    if not _worker_process.alive:
        _worker_process.start()
    yield _worker_process
    try:
        if _worker_process.alive:
            _worker_process.wait_idle(timeout=5.0)
    except AssertionError:
        _worker_process.kill()  # a task that hangs must not meet the next test's rows


@pytest.fixture
def beat(worker: Worker, worker_environment: dict[str, str], tmp_path: Path) -> Iterator[CeleryProcess]:
    """Celery's beat beside the worker, with sweeps every SILTWATCH_SWEEP_SECONDS."""
    arguments = ("beat", "--schedule", str(tmp_path / "beat"), "--pidfile", "", "--loglevel", "INFO")
    process = CeleryProcess(arguments, worker_environment, tmp_path / "beat.log", ready="Starting")
    process.start()
    yield process
    process.kill()


@pytest.fixture(scope="session")
def chromium(django_db_setup: None) -> Iterator["Browser"]:
    """A Chromium found on this machine. Without one the test is skipped, except in CI, where it fails."""
    path = next(filter(None, map(shutil.which, CHROMIUM_NAMES)), None)
    if path is None:
        reason = "no Chromium on this machine (apt-get install chromium)"
        pytest.fail(reason) if os.environ.get("CI") else pytest.skip(reason)
    from playwright.sync_api import sync_playwright

    ours = connections["default"]
    with pytest.MonkeyPatch.context() as patch, sync_playwright() as playwright:
        # Playwright keeps an event loop in this thread: Django would refuse to query beside it, and would take
        # another connection than the one that knows the rows of the migrations.
        patch.setenv("DJANGO_ALLOW_ASYNC_UNSAFE", "1")
        connections["default"] = ours
        browser = playwright.chromium.launch(executable_path=path, args=CHROMIUM_FLAGS)
        yield browser
        browser.close()


@pytest.fixture
def browser_page(chromium: "Browser", committed_rows: None, live_server: LiveServer) -> Iterator["Page"]:
    """A page in a fresh profile; addresses are relative to the live server. Script and policy errors fail the test."""
    context = chromium.new_context(base_url=live_server.url, viewport={"width": 1360, "height": 900}, locale="en-GB")
    context.set_default_timeout(10_000)
    page = context.new_page()
    faults: list[str] = []
    page.on("pageerror", lambda error: faults.append(str(error)))
    page.on("console", lambda line: faults.append(line.text) if "Content Security Policy" in line.text else None)
    yield page
    context.close()
    assert not faults, faults
