"""The whole case as a model: everything mentioned, then the balances, then the relations."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from service.balance.builder import Builder, BuiltCase
from service.balance.case import Case
from service.balance.relations import add_relation
from service.fluids.protocol import Fluid


def build_steady_flow(case: Case, fluids: Mapping[str, Fluid | None], also: Sequence[str] = ()) -> BuiltCase:
    """The model of a steady-flow case; fluids: stream id → property model (None in a pure metering network).

    also: addresses that get values, or are asked for, beyond what the case says (the columns of a series).
    """
    builder = Builder(case, fluids, also)
    for stream in case.streams:
        for name in stream.quantities:
            builder.stream_quantity(stream, name)
    for address in also:
        if address.rpartition(".")[0] in builder.streams:
            builder.address(address)
    builder.default_pressures()
    for relation in case.relations:
        for address in relation.addresses:
            builder.address(address)
    for limit in case.limits:
        builder.address(limit.of)
    builder.mass_balances()
    for boundary in case.boundaries:
        if boundary.id not in builder.mass_only:
            builder.energy_balance(boundary.id)
    builder.drop_dependent_energy_balance()
    for transfer in case.transfers:
        builder.transfer_law(transfer.id)
    for relation in case.relations:
        add_relation(builder, relation)
    builder.give_starting_points()
    return builder.built
