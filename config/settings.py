"""All settings. The environment is read here and nowhere else; README.md lists every variable.

Development and tests need nothing but a database and a broker. Production (SILTWATCH_DEBUG unset) refuses to start
without a secret key, and turns on every cookie and transport guard.
"""

from pathlib import Path

import django_stubs_ext
import plotly
from celery.schedules import crontab
from csp.constants import NONE, SELF, UNSAFE_INLINE
from django.core.exceptions import ImproperlyConfigured
from environs import Env
from kombu import Queue

django_stubs_ext.monkeypatch()

BASE_DIR = Path(__file__).resolve().parent.parent

env = Env()
env.read_env(str(BASE_DIR / ".env"))


def flag(name: str, default: bool) -> bool:
    """A yes-or-no variable; set but empty counts as not set."""
    return env.bool(name) if env.str(name, "") else default


DEBUG = flag("SILTWATCH_DEBUG", False)
SECRET_KEY = env.str("SILTWATCH_SECRET_KEY", "")
if not SECRET_KEY:
    raise ImproperlyConfigured(
        "SILTWATCH_SECRET_KEY is not set. `make run` makes one; in production set a long random text."
    )
ALLOWED_HOSTS = env.list("SILTWATCH_HOSTS", ["localhost", "127.0.0.1", "[::1]"])
SITE_URL = env.str("SILTWATCH_URL", "http://localhost:8000").rstrip("/")
CSRF_TRUSTED_ORIGINS = env.list("SILTWATCH_TRUSTED_ORIGINS", [SITE_URL])
PLAIN_HTTP = flag("SILTWATCH_PLAIN_HTTP", DEBUG)

INSTALLED_APPS = [
    "fleet",
    "samples",
    "alerts",
    "django.contrib.auth",
    "django.contrib.contenttypes",
    "django.contrib.humanize",
    "django.contrib.messages",
    "django.contrib.postgres",
    "django.contrib.sessions",
    "django.contrib.staticfiles",
    "django_htmx",
    "csp",
]

MIDDLEWARE = [
    "django.middleware.security.SecurityMiddleware",
    "whitenoise.middleware.WhiteNoiseMiddleware",
    "django.contrib.sessions.middleware.SessionMiddleware",
    "django.middleware.common.CommonMiddleware",
    "django.middleware.csrf.CsrfViewMiddleware",
    "django.contrib.auth.middleware.AuthenticationMiddleware",
    "django.contrib.auth.middleware.LoginRequiredMiddleware",
    "django.contrib.messages.middleware.MessageMiddleware",
    "django.middleware.clickjacking.XFrameOptionsMiddleware",
    "django_htmx.middleware.HtmxMiddleware",
    "csp.middleware.CSPMiddleware",
]

ROOT_URLCONF = "config.urls"
WSGI_APPLICATION = "config.wsgi.application"

TEMPLATES = [
    {
        "BACKEND": "django.template.backends.django.DjangoTemplates",
        "DIRS": [BASE_DIR / "templates"],
        "APP_DIRS": True,
        "OPTIONS": {
            "context_processors": [
                "django.template.context_processors.request",
                "django.contrib.auth.context_processors.auth",
                "django.contrib.messages.context_processors.messages",
                "alerts.navigation.navigation",
            ],
        },
    },
]
FORM_RENDERER = "django.forms.renderers.TemplatesSetting"
INSTALLED_APPS.insert(INSTALLED_APPS.index("django.contrib.staticfiles"), "django.forms")

DATABASES = {
    "default": env.dj_db_url("DATABASE_URL", "postgres:///siltwatch", conn_max_age=60, conn_health_checks=True)
}
DEFAULT_AUTO_FIELD = "django.db.models.BigAutoField"

AUTH_PASSWORD_VALIDATORS = [
    {"NAME": "django.contrib.auth.password_validation.UserAttributeSimilarityValidator"},
    {"NAME": "django.contrib.auth.password_validation.MinimumLengthValidator"},
    {"NAME": "django.contrib.auth.password_validation.CommonPasswordValidator"},
    {"NAME": "django.contrib.auth.password_validation.NumericPasswordValidator"},
]
AUTH_USER_MODEL = "fleet.Person"
LOGIN_URL = "login"
LOGIN_REDIRECT_URL = "board"
LOGOUT_REDIRECT_URL = "login"

LANGUAGE_CODE = "en-gb"
TIME_ZONE = env.str("SILTWATCH_TIME_ZONE", "UTC")
USE_TZ = True
USE_I18N = True
DATE_FORMAT = "j M Y"

STATIC_URL = "static/"
STATIC_ROOT = env.path("SILTWATCH_STATIC_ROOT", BASE_DIR / ".run" / "static")
STATICFILES_DIRS = [BASE_DIR / "config" / "static"]
PLOTLY_SCRIPT = Path(plotly.__file__).parent / "package_data" / "plotly.min.js"
STATICFILES_FINDERS = [
    "django.contrib.staticfiles.finders.FileSystemFinder",
    "django.contrib.staticfiles.finders.AppDirectoriesFinder",
    "config.vendored.ChartScriptFinder",
]
STORAGES = {
    "default": {"BACKEND": "django.core.files.storage.FileSystemStorage"},
    "staticfiles": {
        "BACKEND": "django.contrib.staticfiles.storage.StaticFilesStorage"
        if DEBUG
        else "config.static_storage.HashedStaticStorage"
    },
}

SESSION_COOKIE_SECURE = CSRF_COOKIE_SECURE = not PLAIN_HTTP
SESSION_COOKIE_HTTPONLY = True
SECURE_SSL_REDIRECT = not PLAIN_HTTP
SECURE_PROXY_SSL_HEADER = ("HTTP_X_FORWARDED_PROTO", "https") if flag("SILTWATCH_BEHIND_PROXY", False) else None
SECURE_REDIRECT_EXEMPT = [r"^healthz/$"]
SECURE_HSTS_SECONDS = 0 if PLAIN_HTTP else env.int("SILTWATCH_HSTS_SECONDS", 31_536_000)
SECURE_HSTS_INCLUDE_SUBDOMAINS = SECURE_HSTS_PRELOAD = not PLAIN_HTTP
SECURE_REFERRER_POLICY = "same-origin"
X_FRAME_OPTIONS = "DENY"
# Plotly sets inline style attributes; nothing needs inline scripts or eval.
CONTENT_SECURITY_POLICY = {
    "DIRECTIVES": {
        "default-src": [SELF],
        "script-src": [SELF],
        "style-src": [SELF, UNSAFE_INLINE],
        "img-src": [SELF, "data:", "blob:"],
        "object-src": [NONE],
        "base-uri": [SELF],
        "form-action": [SELF],
        "frame-ancestors": [NONE],
    }
}

# Uploads: a lab file is text; anything past this is refused before it is read.
LAB_FILE_MAX_BYTES = env.int("SILTWATCH_LAB_FILE_MAX_BYTES", 5 * 1024 * 1024)
DATA_UPLOAD_MAX_MEMORY_SIZE = 2 * 1024 * 1024

EMAIL_BACKEND = env.str("SILTWATCH_EMAIL_BACKEND", "django.core.mail.backends.smtp.EmailBackend")
EMAIL_HOST = env.str("SILTWATCH_SMTP_HOST", "localhost")
EMAIL_PORT = env.int("SILTWATCH_SMTP_PORT", 25)
EMAIL_HOST_USER = env.str("SILTWATCH_SMTP_USER", "")
EMAIL_HOST_PASSWORD = env.str("SILTWATCH_SMTP_PASSWORD", "")
EMAIL_USE_TLS = flag("SILTWATCH_SMTP_TLS", False)
EMAIL_TIMEOUT = 20
DEFAULT_FROM_EMAIL = env.str("SILTWATCH_MAIL_FROM", "Siltwatch <siltwatch@localhost>")

REDIS_URL = env.str("REDIS_URL", "redis://localhost:6379/0")
# A socket path is unix://… for the redis client and redis+socket://… for Celery.
CELERY_BROKER_URL = (
    REDIS_URL.replace("unix://", "redis+socket://").replace("?db=", "?virtual_host=")
    if REDIS_URL.startswith("unix://")
    else REDIS_URL
)
CELERY_TASK_IGNORE_RESULT = True
CELERY_TASK_SERIALIZER = "json"
CELERY_ACCEPT_CONTENT = ["json"]
CELERY_TASK_ACKS_LATE = True
CELERY_TASK_REJECT_ON_WORKER_LOST = True
CELERY_WORKER_PREFETCH_MULTIPLIER = 1
# Whole fleets and mail have queues of their own: a saved sample waits neither for them nor for a slow mail server.
CELERY_TASK_QUEUES = [Queue("celery"), Queue("bulk"), Queue("mail")]
CELERY_TASK_ROUTES = {
    "samples.tasks.refresh_many": {"queue": "bulk"},
    "alerts.tasks.send_delivery": {"queue": "mail"},
}
CELERY_BROKER_CONNECTION_RETRY_ON_STARTUP = True
CELERY_BROKER_TRANSPORT_OPTIONS = {"visibility_timeout": 900, "socket_connect_timeout": 2, "socket_timeout": 30}
# Nobody waits at a form for a broker that is down: the sweep finds the row.
CELERY_TASK_PUBLISH_RETRY_POLICY = {"max_retries": 1, "interval_start": 0.1, "interval_max": 0.1}
CELERY_TASK_SOFT_TIME_LIMIT = 300
CELERY_TASK_TIME_LIMIT = 360
CELERY_TIMEZONE = "UTC"
# Rows are the truth and messages a hint: each sweep finds what a lost message left undone.
SWEEP_SECONDS = env.float("SILTWATCH_SWEEP_SECONDS", 30.0)
CELERY_BEAT_SCHEDULE = {
    "sweep-outlooks": {
        "task": "samples.tasks.sweep_outlooks",
        "schedule": SWEEP_SECONDS,
        "options": {"expires": SWEEP_SECONDS},
    },
    "evaluate-alerts": {
        "task": "alerts.tasks.evaluate_changed",
        "schedule": SWEEP_SECONDS,
        "options": {"expires": SWEEP_SECONDS},
    },
    "send-due-deliveries": {
        "task": "alerts.tasks.send_due",
        "schedule": SWEEP_SECONDS,
        "options": {"expires": SWEEP_SECONDS},
    },
    "refresh-all-outlooks": {
        "task": "samples.tasks.refresh_all",
        "schedule": crontab(hour=2, minute=10),
        "options": {"expires": 3600},
    },
}

# Apps point one way only, so what must follow a change further up is named here and sent by name after the commit.
AFTER_FLEET_CHANGE_TASKS = ["samples.tasks.refresh_outlook"]  # each called with one reservoir's id
AFTER_REFRESH_TASKS = ["alerts.tasks.evaluate_changed"]  # each called without arguments

# How long a claimed delivery may stay in "sending" before it counts as broken off. Longer than the longest send, which
# the worker ends after 300 s: freed too early, a second copy would go out.
DELIVERY_STUCK_SECONDS = env.float("SILTWATCH_DELIVERY_STUCK_SECONDS", 480.0)

LOGGING = {
    "version": 1,
    "disable_existing_loggers": False,
    "handlers": {"console": {"class": "logging.StreamHandler"}},
    # A refused page is an answer, not a fault.
    "loggers": {"django.request": {"level": "ERROR"}},
    "root": {"handlers": ["console"], "level": env.str("SILTWATCH_LOG_LEVEL", "INFO")},
}

if DEBUG:
    INTERNAL_IPS = ["127.0.0.1"]
