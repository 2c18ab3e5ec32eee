"""Serving in production settings: gunicorn, one synchronous worker a core, everything loaded before the fork."""

from __future__ import annotations

import gc
import os
from pathlib import Path
from typing import Any

from flask import Flask
from gunicorn.app.base import BaseApplication

from service.app import create_app
from service.logs import ServerLog
from service.settings import Settings

GRACE = 10
"""Seconds that a request may take beyond the time budget, for reading and writing, before its worker is ended."""


class Server(BaseApplication):  # type: ignore[misc]  # gunicorn has no types
    """gunicorn around the application.

    Synchronous workers behind a buffering proxy, since solving is pure computation and CoolProp holds the interpreter's
    lock; the application is built before the fork, so that a restarted worker is ready at once.
    """

    def __init__(self, settings: Settings) -> None:
        self.settings = settings
        super().__init__()

    def load_config(self) -> None:
        """Hand the settings to gunicorn."""
        for name, value in options(self.settings).items():
            self.cfg.set(name, value)

    def load(self) -> Flask:
        """Build the application, and ask it once whether it is ready: what that loads is shared by all workers.

        What was built stays for good, so the garbage collector is told to leave it alone, and to look less often for
        cycles in requests that make none.
        """
        app = create_app(self.settings)
        app.test_client().get("/readyz")
        gc.collect()
        gc.freeze()
        gc.set_threshold(20_000, 20, 20)
        return app


def options(settings: Settings) -> dict[str, Any]:
    """gunicorn's configuration for our settings."""
    chosen: dict[str, Any] = {
        "bind": f"{settings.host}:{settings.port}",
        "workers": settings.workers or os.cpu_count() or 1,
        "worker_class": "sync",
        "preload_app": True,
        "timeout": int(settings.time_budget) + GRACE,
        "graceful_timeout": int(settings.time_budget) + GRACE,
        "max_requests": 0,
        "proc_name": "balance",
        "control_socket_disable": True,
        "logger_class": ServerLog,
        "loglevel": settings.log_level,
        "errorlog": "-",
        "accesslog": "-" if settings.log_level in ("debug", "info") else None,
    }
    if Path("/dev/shm").is_dir():
        chosen["worker_tmp_dir"] = "/dev/shm"  # a heartbeat file on a slow disk can hold a worker up
    return chosen


def serve(settings: Settings) -> None:
    """Serve until told to stop."""
    Server(settings).run()
