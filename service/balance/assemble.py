"""The whole case as a model: everything mentioned, then the balances, then the relations."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from service.balance.accumulation import add_accumulating_balances, add_contents, refuse_humid_air
from service.balance.balances import (
    add_energy_balance,
    add_mass_balances,
    add_transfer,
    default_pressures,
    give_starting_points,
    imply_dependent_energy_balance,
)
from service.balance.builder import Builder, BuiltCase
from service.balance.case import Case
from service.balance.network import refuse_dead_ends
from service.balance.relations import add_relation
from service.fluids.protocol import Fluid


def build_accumulating(case: Case, fluids: Mapping[str, Fluid | None], also: Sequence[str] = ()) -> BuiltCase:
    """The model of a closed system, or of a transient in its integrated form; arguments as for steady flow.

    fluids: property models by stream id and by content id.
    """
    refuse_humid_air(case, fluids)
    builder = Builder(case, fluids, also)
    for stream in case.streams:
        for name in stream.quantities:
            builder.stream_quantity(stream, name)
    add_contents(builder)
    for address in also:
        if address.partition(".")[0] in (*builder.streams, *builder.contents):
            builder.address(address)
    _mentioned(builder)
    add_accumulating_balances(builder)
    for relation in case.relations:
        add_relation(builder, relation)
    give_starting_points(builder)
    return builder.built


def _mentioned(builder: Builder) -> None:
    """Variables for what relations and limits name: they must exist before the balances take them in."""
    for relation in builder.case.relations:
        for address in relation.addresses:
            builder.address(address)
    for limit in builder.case.limits:
        builder.address(limit.of)


def build_steady_flow(case: Case, fluids: Mapping[str, Fluid | None], also: Sequence[str] = ()) -> BuiltCase:
    """The model of a steady-flow case; fluids: stream id → property model (None in a pure metering network).

    also: addresses that get values, or are asked for, beyond what the case says (the columns of a series).
    """
    builder = Builder(case, fluids, also)
    refuse_dead_ends(case, builder.built.circuits)
    for stream in case.streams:
        for name in stream.quantities:
            builder.stream_quantity(stream, name)
    for address in also:
        if address.rpartition(".")[0] in builder.streams:
            builder.address(address)
    default_pressures(builder)
    _mentioned(builder)
    add_mass_balances(builder)
    for boundary in case.boundaries:
        if boundary.id not in builder.mass_only:
            add_energy_balance(builder, boundary.id)
    imply_dependent_energy_balance(builder)
    for transfer in case.transfers:
        add_transfer(builder, transfer.id)
    for relation in case.relations:
        add_relation(builder, relation)
    give_starting_points(builder)
    return builder.built
