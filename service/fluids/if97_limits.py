"""Range of IAPWS-IF97 and its saturation line.

Source: IAPWS R7-97(2012), section 1 (range of validity), section 8 (region 4); value from memory, held against the
release's verification values in the tests.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from service.fluids.protocol import Column

T_MIN, T_MAX = 273.15, 2273.15  # [K]
HOT, HOT_PRESSURE = 1073.15, 5e7  # [K], [Pa] above HOT the pressure goes to HOT_PRESSURE only
P_MIN, P_MAX = 611.213, 1e8  # [Pa]
T_CRITICAL, P_CRITICAL, RHO_CRITICAL = 647.096, 22.064e6, 322.0

SPANS: Mapping[str, tuple[float, float]] = {
    "p": (P_MIN, P_MAX),
    "T": (T_MIN, T_MAX),
    "h": (-2e3, 7.5e6),
    "s": (-15.0, 1.5e4),
    "u": (-2e3, 6.5e6),
    "rho": (5e-4, 1.05e3),
    "v": (1.0 / 1.05e3, 2e3),
}
"""Property → range [SI] of all states, with a little to spare."""

_N = (
    0.11670521452767e4, -0.72421316703206e6, -0.17073846940092e2, 0.12020824702470e5, -0.32325550322333e7,
    0.14915108613530e2, -0.48232657361591e4, 0.40511340542057e6, -0.23855557567849, 0.65017534844798e3,
)  # fmt: skip


def boiling_temperature(p: Column) -> Column:
    """Saturation temperature [K] at p [Pa], 611.213 Pa to the critical pressure. Equation 31 of the release."""
    n1, n2, n3, n4, n5, n6, n7, n8, n9, n10 = _N
    b2 = np.sqrt(p * 1e-6)
    b = np.sqrt(b2)
    E = b2 + n3 * b + n6
    F = n1 * b2 + n4 * b + n7
    G = n2 * b2 + n5 * b + n8
    D = 2.0 * G / (-F - np.sqrt(F * F - 4.0 * E * G))
    total = n10 + D
    found: Column = 0.5 * (total - np.sqrt(total * total - 4.0 * (n9 + n10 * D)))
    return found
