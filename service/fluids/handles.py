"""A state object of the property library with its methods at hand. One thread, one handle."""

from __future__ import annotations

from typing import Any


class Handle:
    """backend: the library's state object; the rest are its methods, bound once."""

    __slots__ = ("Q", "T", "backend", "h", "p", "rho", "s", "u", "update")

    def __init__(self, backend: Any) -> None:
        self.backend = backend
        self.update = backend.update
        self.p, self.T, self.Q = backend.p, backend.T, backend.Q
        self.h, self.s, self.u, self.rho = backend.hmass, backend.smass, backend.umass, backend.rhomass
