"""Uncertainty of answers from the uncertainty of readings, by the law of propagation (first order, no correlation).

u²(y) = Σ (∂y/∂x_i)² u²(x_i)            JCGM 100:2008 (GUM), 5.1.2
"""

from __future__ import annotations

from service.balance.builder import BuiltCase
from service.balance.solution import Uncertainty
from service.engine.execute import Run
from service.engine.plan import Plan
from service.engine.sensitivity import sensitivities


def uncertainties(built: BuiltCase, plan: Plan, done: Run) -> dict[str, Uncertainty]:
    """Standard uncertainty [SI] of each answer, with the share of each reading; empty where no reading states one."""
    stated = {
        built.model.index[q.address]: q.u for q in built.case.quantities() if q.u and q.address in built.model.index
    }
    if not stated:
        return {}
    inputs = [v for v in stated if v in built.model.given]
    slopes = sensitivities(plan, done, inputs)
    names = built.model.variables
    result = {}
    for address in (q.address for q in built.case.quantities() if q.wanted):
        answer = built.model.index[address]
        parts = {
            names[v].name: (float(slope), float(slope) * stated[v])
            for v, slope in zip(inputs, slopes[answer], strict=True)
        }
        variance = sum(part**2 for _, part in parts.values())
        shares = {n: (slope, part**2 / variance if variance else 0.0) for n, (slope, part) in parts.items()}
        result[address] = Uncertainty(variance**0.5, shares)
    return result
