"""Runs Siltwatch on one machine: its own PostgreSQL and broker, web server, worker and beat, under one supervisor.

Nothing here imports Django: what needs it is started as a child through manage.py. `python -m config.stack --help`.
"""
