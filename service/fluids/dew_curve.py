"""Where a gas mixture starts to condense: T_dew(p), cheap enough to ask before every state.

Imposing the gas phase makes a mixture's state a hundred times cheaper, and silently wrong below the dew point. So the
dew temperature is flashed (about 2 ms) on a coarse grid of pressures, once a mixture, and interpolated as 1/T over
ln p, which is nearly a straight line (Clausius-Clapeyron); close to the line it is flashed exactly.

Above the highest pressure whose flash succeeds the line is carried on straight. The true curve bends back to lower
temperatures there (retrograde condensation ends at the cricondenbar), so that this errs on the safe side.
"""

from __future__ import annotations

import math
import threading
from collections.abc import Callable

START = math.log(1e5)  # [ln Pa] the grid's origin
STEP = math.log(10.0) / 4.0  # four pressures a decade
LOWEST, HIGHEST = -16, 12  # nodes: 10 Pa to 100 MPa
NEAR = 0.02  # relative distance in T from the line within which it is flashed exactly
PLAUSIBLE = 0.5  # a flashed node may miss the straight line by this part of its step, else it is not believed


class DewCurve:
    """T_dew(p) of one mixture. `flash(p)` returns a dew temperature [K] or None where it finds none."""

    def __init__(self, flash: Callable[[float], float | None], estimate: Callable[[float], float]) -> None:
        self._flash = flash
        self._estimate = estimate
        self._inverse: dict[int, float] = {}  # node -> 1/T [1/K] of the flashes believed
        self._asked: set[int] = set()
        self._lock = threading.Lock()

    def condenses(self, p: float, T: float) -> float | None:
        """The dew temperature [K] where it lies above T [K] at p [Pa]: then the mixture would condense. Else None."""
        line = self.temperature(p)
        if line * (1.0 + NEAR) < T:
            return None
        if line * (1.0 - NEAR) <= T:
            exact = self._flash(p)
            if exact is not None and abs(exact / line - 1.0) < NEAR:
                line = exact
        return line if line > T else None

    def temperature(self, p: float) -> float:
        """T_dew [K] at p [Pa] from the grid."""
        place = (math.log(p) - START) / STEP
        low = min(max(math.floor(place), LOWEST), HIGHEST - 1)
        with self._lock:
            self._reach(low)
            return 1.0 / self._line(place, low)

    def exact(self, p: float) -> float:
        """T_dew [K] at p [Pa]: flashed where that succeeds, else from the grid."""
        line = self.temperature(p)
        found = self._flash(p)
        return found if found is not None and abs(found / line - 1.0) < NEAR else line

    def _reach(self, low: int) -> None:
        """Flashes every node between the origin and this one that has not been asked for yet."""
        for node in (0, 1, *range(2, low + 2), *range(-1, low - 1, -1)):
            if node not in self._asked:
                self._asked.add(node)
                self._flash_node(node)

    def _flash_node(self, node: int) -> None:
        p = math.exp(START + STEP * node)
        T = self._flash(p)
        if T is None:
            return
        expected = self._line(node, node) if self._inverse else 1.0 / self._estimate(p)
        width = abs(self._slope(node)) if len(self._inverse) > 1 else 0.25 * expected
        if abs(1.0 / T - expected) <= PLAUSIBLE * width * max(1, self._distance(node)):
            self._inverse[node] = 1.0 / T

    def _distance(self, node: int) -> int:
        return min((abs(node - known) for known in self._inverse), default=1)

    def _slope(self, node: int) -> float:
        """d(1/T) a node, from the two known nodes nearest to this one."""
        near = sorted(self._inverse, key=lambda known: abs(known - node))[:2]
        if len(near) < 2:
            p = math.exp(START + STEP * node)
            return 1.0 / self._estimate(p * math.exp(STEP)) - 1.0 / self._estimate(p)
        a, b = near
        return (self._inverse[a] - self._inverse[b]) / (a - b)

    def _line(self, place: float, low: int) -> float:
        """1/T [1/K] at a place on the grid: between two known nodes, or carried on straight from the nearest."""
        if low in self._inverse and low + 1 in self._inverse:
            part = place - low
            return (1.0 - part) * self._inverse[low] + part * self._inverse[low + 1]
        if not self._inverse:
            return 1.0 / self._estimate(math.exp(START + STEP * place))
        nearest = min(self._inverse, key=lambda known: abs(known - place))
        return max(self._inverse[nearest] + self._slope(nearest) * (place - nearest), 1e-4)
