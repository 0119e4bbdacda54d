"""Whether this process can do its work: asked by the supervisor, by containers and by load balancers."""

from collections.abc import Callable

import redis
from django.conf import settings
from django.contrib.auth.decorators import login_not_required
from django.db import DatabaseError, connection
from django.http import HttpRequest, JsonResponse
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_safe

BROKER_SECONDS = 2.0


def database_answers() -> bool:
    try:
        with connection.cursor() as cursor:
            cursor.execute("SELECT 1")
    except DatabaseError:
        return False
    return True


def broker_answers() -> bool:
    try:
        with redis.Redis.from_url(
            settings.REDIS_URL, socket_timeout=BROKER_SECONDS, socket_connect_timeout=BROKER_SECONDS
        ) as client:
            return bool(client.ping())
    except redis.RedisError:
        return False


CHECKS: dict[str, Callable[[], bool]] = {"database": database_answers, "broker": broker_answers}


@require_safe
@never_cache
@login_not_required
def healthz(request: HttpRequest) -> JsonResponse:
    """200 when the database and the broker answer, otherwise 503; the body names which one does not."""
    answers = {name: check() for name, check in CHECKS.items()}
    parts = {name: "answers" if good else "does not answer" for name, good in answers.items()}
    return JsonResponse(parts, status=200 if all(answers.values()) else 503)
