"""Serving in production settings: gunicorn, one synchronous worker a core, everything loaded before the fork."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

from flask import Flask
from gunicorn.app.base import BaseApplication

from service.app import create_app
from service.settings import Settings


class Server(BaseApplication):  # type: ignore[misc]  # gunicorn has no types
    """gunicorn around the application.

    Synchronous workers behind a buffering proxy, since solving is pure computation and CoolProp holds the interpreter's
    lock; the application is built before the fork, so that a restarted worker is ready at once.
    """

    def __init__(self, settings: Settings) -> None:
        self.settings = settings
        super().__init__()

    def load_config(self) -> None:
        settings = self.settings
        options: dict[str, Any] = {
            "bind": f"{settings.host}:{settings.port}",
            "workers": settings.workers or os.cpu_count() or 1,
            "worker_class": "sync",
            "preload_app": True,
            "timeout": int(settings.time_budget) + 30,
            "graceful_timeout": int(settings.time_budget) + 10,
            "loglevel": settings.log_level,
            "control_socket_disable": True,
        }
        if Path("/dev/shm").is_dir():
            options["worker_tmp_dir"] = "/dev/shm"
        for name, value in options.items():
            if name in self.cfg.settings:
                self.cfg.set(name, value)

    def load(self) -> Flask:
        return create_app(self.settings)


def serve(settings: Settings) -> None:
    """Serve until told to stop."""
    Server(settings).run()
