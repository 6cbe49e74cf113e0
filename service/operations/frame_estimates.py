"""What is most likely where, when more relations are known than needed, and which one seems wrong.

Left out: the arithmetic (the core's).
"""

from collections.abc import Callable, Sequence
from math import sqrt
from time import monotonic

import numpy as np

from kinematics.errors import OutOfRange
from kinematics.frame_estimate import Estimate, estimate
from kinematics.frame_suspects import Suspects, suspects_of
from kinematics.tolerances import RELATION_WRONG
from service.convert import Units, orientation_out
from service.errors import TooLarge
from service.operations.frame_network import Network, whole_name

MOST_ALIKE = 20

MOST_SECONDS = 20.0
"""Of one estimate's work: three times what the largest networks take whose deviations are alike.
Meanwhile all other long requests share one thread."""


def estimate_answer(
    network: Network,
    of: Sequence[str],
    within: Sequence[str],
    form: str,
    units: Units,
    between: Callable[[], None],
) -> dict[str, object]:
    """Return the most likely poses of pairs that are connected, residuals and the suspect.

    Parameters
    ----------
    between : called now and then; may raise to give up.

    Raises
    ------
    OutOfRange : standard deviations differ too much.
    TooLarge : with status 422, after MOST_SECONDS.
    """
    between = _in_time(between)
    try:
        found = estimate(network.graph, network.position_sd, network.angle_sd, between)
    except OutOfRange as error:
        is_position = error.where[-1] == "position_sd"
        sds, unit = (network.position_sd, "m") if is_position else (network.angle_sd, "rad")
        error.value = units.shortest_out(float(sds[int(error.where[1])]), unit)
        raise
    suspects = suspects_of(found, between)
    return {
        "converged": found.settled,
        "iterations": found.iterations,
        "degrees_of_freedom": found.freedom,
        "misfit": found.misfit,
        "answers": _poses(network, found, of, within, form, units),
        "residuals": _residuals(network, found, suspects, units),
        "redundancies_exact": suspects.is_exact,
        "suspect": _suspect(network, suspects),
    }


def _in_time(between: Callable[[], None]) -> Callable[[], None]:
    """Return what gives up when ``between`` does, or when it has taken too long from now."""
    end = monotonic() + MOST_SECONDS

    def check() -> None:
        between()
        if monotonic() > end:
            raise TooLarge(
                f"the estimate was given up after {MOST_SECONDS:g} s",
                where=("estimate",),
                value=True,
                way_out="give fewer relations at once, or standard deviations that differ less; "
                "or ask without estimate",
                status=422,
            )

    return check


def _poses(
    network: Network,
    found: Estimate,
    of: Sequence[str],
    within: Sequence[str],
    form: str,
    units: Units,
) -> list[dict[str, object]]:
    outer, inner = (
        network.graph.connections.numbers_of([whole_name(network.arms, name, ()) for name in names])
        for names in (of, within)
    )
    poses = found.pose_between(outer, inner)
    positions = units.length_out(poses[:, :3, 3]).tolist()
    orientations = orientation_out(units, form, poses[:, :3, :3]).tolist()
    return [
        {
            "of": of[pair],
            "in": within[pair],
            "pose": {
                "position": positions[pair],
                "orientation": {"form": form, "values": orientations[pair]},
            },
        }
        for pair in range(len(of))
    ]


def _residuals(
    network: Network, found: Estimate, suspects: Suspects, units: Units
) -> list[dict[str, object]]:
    positions = units.length_out(found.position_residual).tolist()
    angles = units.angle_out(found.angle_residual).tolist()
    normalised = np.sqrt(suspects.drop).tolist()
    redundancies = suspects.redundancy.tolist()
    return [
        {
            **_relation(network, number),
            "position": positions[number],
            "angle": angles[number],
            "normalised": normalised[number],
            "redundancy": redundancies[number],
        }
        for number in range(len(positions))
    ]


def _suspect(network: Network, suspects: Suspects) -> dict[str, object] | None:
    worst = suspects.most_likely
    if worst is None:
        return None
    others = [number for number in suspects.alike if number != worst]
    named = _relation(network, worst)
    say = f"{named['of']} in {named['in']} most likely is wrong"
    if others:
        say = (
            f"a mistake in any of {len(suspects.alike)} relations would explain this as well; "
            f"{named['of']} in {named['in']} is off the most. One more relation across the loop "
            "can tell them apart"
        )
    if not suspects.is_beyond_chance:
        say += "; but the stated standard deviations explain as much by chance"
    return {
        **named,
        "normalised": sqrt(float(suspects.drop[worst])),
        "threshold": sqrt(RELATION_WRONG),
        "beyond_chance": suspects.is_beyond_chance,
        "alike": [_relation(network, number) for number in others[:MOST_ALIKE]],
        "say": say,
    }


def _relation(network: Network, number: int) -> dict[str, object]:
    """Return a relation's frames, and its place in the request if that is where it stands."""
    graph = network.graph
    return {
        "of": graph.names[graph.outer[number]],
        "in": graph.names[graph.inner[number]],
        "relation": number if number < network.given else None,
    }
