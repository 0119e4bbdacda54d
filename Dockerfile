# The same steps as `make`: a virtual environment from requirements.lock, here without what only tests and trials need.
FROM python:3.13-slim AS build
ENV PIP_DISABLE_PIP_VERSION_CHECK=1 UV_LINK_MODE=copy PYTHONDONTWRITEBYTECODE=1
WORKDIR /app
RUN python -m venv /opt/venv && /opt/venv/bin/pip install --quiet uv==0.13.9
COPY pyproject.toml requirements.lock ./
# The lock's versions and hashes bind as constraints; aiosmtpd is for the mail catcher of docker-compose.yml.
RUN /opt/venv/bin/uv pip install --quiet --no-cache --python /opt/venv/bin/python \
      --requirements pyproject.toml aiosmtpd --constraints requirements.lock \
    && /opt/venv/bin/pip uninstall --quiet --yes uv pip
COPY . .
RUN SILTWATCH_SECRET_KEY=only-for-collecting-files SILTWATCH_STATIC_ROOT=/app/static \
      /opt/venv/bin/python manage.py collectstatic --no-input \
    && /opt/venv/bin/python -m compileall -q config fleet samples alerts

FROM python:3.13-slim
ENV PATH=/opt/venv/bin:$PATH \
    PYTHONUNBUFFERED=1 \
    PYTHONDONTWRITEBYTECODE=1 \
    DJANGO_SETTINGS_MODULE=config.settings \
    SILTWATCH_STATIC_ROOT=/app/static
RUN useradd --system --uid 10001 --user-group --no-create-home --home-dir /nonexistent --shell /usr/sbin/nologin siltwatch \
    && install --directory --owner=siltwatch --group=siltwatch --mode=0700 /mail
COPY --from=build /opt/venv /opt/venv
COPY --from=build /app /app
WORKDIR /app
USER siltwatch
EXPOSE 8000
HEALTHCHECK --interval=30s --timeout=10s --start-period=30s --retries=3 CMD ["python", "-m", "config.stack", "health"]
CMD ["gunicorn", "config.wsgi", "--bind", "0.0.0.0:8000", "--workers", "2", "--threads", "4", \
     "--worker-tmp-dir", "/dev/shm", "--no-control-socket", "--access-logfile", "-"]
