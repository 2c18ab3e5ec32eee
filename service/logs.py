"""Logs as JSON lines: requests on standard output, everything else on standard error.

A request's line has a number (the client's X-Request-Id where it sent a plain one), so that the lines of one request
can be put together. Nothing of its body and none of its query is logged.
"""

from __future__ import annotations

import json
import logging
import re
import uuid
from datetime import UTC, datetime, timedelta
from typing import Any

from flask import Flask, g, has_request_context, request
from gunicorn.glogging import Logger

REQUEST_ID = "service.request_id"
LONGEST_PATH = 200
_PLAIN_ID = re.compile(r"[A-Za-z0-9._-]{1,64}")


def number_requests(app: Flask) -> None:
    """Give every request its number before anything else happens to it."""

    @app.before_request
    def number() -> None:
        sent = request.headers.get("X-Request-Id", "")
        g.request_id = sent if _PLAIN_ID.fullmatch(sent) else uuid.uuid4().hex
        request.environ[REQUEST_ID] = g.request_id


class JsonLines(logging.Formatter):
    """One record as one line of JSON; what a record tells beside its message stands in its `told`."""

    def format(self, record: logging.LogRecord) -> str:
        at = datetime.fromtimestamp(record.created, UTC)
        line: dict[str, Any] = {
            "time": at.isoformat(timespec="milliseconds").replace("+00:00", "Z"),
            "level": record.levelname.lower(),
            "message": record.getMessage(),
            "process": record.process,
            **getattr(record, "told", {}),
        }
        if has_request_context() and "request_id" in g:
            line["request_id"] = g.request_id
        if record.exc_info:
            line["traceback"] = self.formatException(record.exc_info)
        return json.dumps(line, ensure_ascii=False, default=str)


class ServerLog(Logger):  # type: ignore[misc]  # gunicorn has no types
    """gunicorn's two logs and the application's own, as JSON lines."""

    def setup(self, cfg: Any) -> None:
        super().setup(cfg)
        for log in (self.error_log, self.access_log):
            for handler in log.handlers:
                handler.setFormatter(JsonLines())
        ours = logging.getLogger("service")
        ours.handlers = list(self.error_log.handlers)
        ours.setLevel(self.loglevel)
        ours.propagate = False

    def access(self, resp: Any, req: Any, environ: dict[str, Any], request_time: timedelta) -> None:
        """One line a request; duration in milliseconds, the size of the body sent in bytes."""
        if not self.access_log_enabled:
            return
        told = {
            "method": environ.get("REQUEST_METHOD", "")[:20],
            "path": environ.get("PATH_INFO", "")[:LONGEST_PATH],
            "status": int(str(resp.status).split(None, 1)[0]),
            "milliseconds": round(request_time.total_seconds() * 1e3, 2),
            "bytes": resp.sent,
            "client": environ.get("REMOTE_ADDR", ""),
            "request_id": environ.get(REQUEST_ID, ""),
        }
        self.access_log.info("request", extra={"told": told})
