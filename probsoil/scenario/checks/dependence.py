"""Checks of the rank correlations: each by itself, then all together."""

from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.quantities import (
    all_quantities,
    further_address,
    possible_addresses,
    stage_address,
    unread_addresses,
)
from probsoil.scenario.slips import Slip, did_you_mean

Pair = tuple[str, str]


def dependence_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the rank correlations.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    if not scenario.dependence:
        return []
    addresses = _Addresses(scenario)
    slips: list[Slip] = []
    seen: dict[Pair, int] = {}
    sound: dict[Pair, tuple[int, float]] = {}
    for position, entry in enumerate(scenario.dependence):
        if entry is UNREAD or entry.between is UNREAD:
            continue
        found = _pair_slips(entry.between, addresses, seen)
        slips += [slip.below(("dependence", position)) for slip in found]
        seen.setdefault(entry.between, position)
        if not found and entry.rank_correlation is not UNREAD:
            sound[entry.between] = (position, entry.rank_correlation)
    return slips + _joint_slips(sound)


class _Addresses:
    """What each address of a scenario may be used for."""

    def __init__(self, scenario: Any) -> None:
        found = all_quantities(scenario)
        self.uncertain = [quantity.address for quantity in found if quantity.is_uncertain]
        self.fixed = {quantity.address for quantity in found if not quantity.is_uncertain}
        tables: list[tuple[Any, Any]] = [
            ("site", scenario.site),
            ("load", scenario.load),
            ("model_error", scenario.model_error),
        ]
        tables += [] if scenario.drains is None else [("drains", scenario.drains)]
        tables += [
            (one.name if one.name is UNREAD else address(one.name), one)
            for group, address in (
                (scenario.further_loads, further_address),
                (scenario.stages, stage_address),
            )
            for one in group
            if one is not UNREAD
        ]
        tables += [(layer.name, layer) for layer in scenario.layers if layer is not UNREAD]
        named = [(name, table) for name, table in tables if name is not UNREAD and table is not UNREAD]
        self.possible = {
            address for name, table in named for address in possible_addresses(name, type(table))
        }
        self.unread = {address for name, table in named for address in unread_addresses(name, table)}
        self.names = [name for name, _ in named]
        unread = any(UNREAD in group for group in (scenario.layers, scenario.further_loads, scenario.stages))
        self.some_unnamed = len(named) < len(tables) or unread

    def complaint(self, address: str) -> tuple[str, str | None] | None:
        """Message and hint where an address cannot be correlated."""
        if address in self.uncertain or address in self.unread:
            return None
        if address in self.fixed:
            return f'"{address}" is a fixed number', "give it a distribution, or leave the correlation out"
        if address in self.possible:
            return f'"{address}" is not given in this scenario', did_you_mean(address, self.uncertain)
        if self.some_unnamed and address.rpartition(".")[0] not in self.names:
            return None
        return f'no uncertain number has the address "{address}"', did_you_mean(address, self.uncertain)

    def beside(self, address: str) -> list[str]:
        """Uncertain numbers of the same table, or all where there is no such table."""
        start = address.rpartition(".")[0] + "."
        return [known for known in self.uncertain if known.startswith(start)] or self.uncertain


def _pair_slips(pair: Pair, addresses: _Addresses, seen: dict[Pair, int]) -> list[Slip]:
    if pair[0] == pair[1]:
        message = f'"{pair[0]}" is correlated with itself'
        return [Slip(path=("between", 1), message=message, allowed="two different uncertain numbers")]
    slips = []
    for place, address in enumerate(pair):
        complaint = addresses.complaint(address)
        if complaint is not None:
            allowed = "uncertain numbers: " + ", ".join(addresses.beside(address))
            slips.append(
                Slip(path=("between", place), message=complaint[0], allowed=allowed, hint=complaint[1])
            )
    earlier = seen.get(pair, seen.get((pair[1], pair[0])))
    if earlier is not None:
        message = f"dependence {earlier + 1} already gives the correlation of these two"
        slips.append(Slip(path=("between",), message=message, allowed="each pair once"))
    return slips


def _joint_slips(sound: dict[Pair, tuple[int, float]]) -> list[Slip]:
    if not sound:
        return []
    from probsoil.scenario.correlation import impossible_sets  # deferred: needs numpy

    slips = []
    for impossible in impossible_sets({pair: rank for pair, (_, rank) in sound.items()}):
        listed = "; ".join(f"{a} with {b}: {sound[a, b][1]:g}" for a, b in impossible)
        nearest = "; ".join(f"{a} with {b}: {rank:.3f}" for (a, b), rank in impossible.items())
        slips.append(
            Slip(
                path=("dependence", sound[next(iter(impossible))][0], "rank_correlation"),
                message=f"these rank correlations cannot hold together: {listed}",
                allowed="a positive definite correlation matrix (2 sin(pi r / 6), pairs not given being 0)",
                hint=f"nearest that can hold (Higham 2002, drawn in a little): {nearest}",
            )
        )
    return slips
