"""Frames: any pose by way of known relations, every loop, and what is most likely.

Left out: which relations there are (frame_network.py), how the question arrives.
"""

from collections.abc import Callable, Sequence, Set
from dataclasses import replace

from kinematics.arm_relations import ArmAtJoints
from kinematics.errors import KinematicsError
from kinematics.findings import FINE, Finding
from kinematics.frames import FrameGraph, Ways
from kinematics.table import FloatArray
from kinematics.tolerances import LOCK_NOTICE, LOOP_CLOSED
from kinematics.travel_limits import travel_findings
from service.convert import (
    UNITS,
    Units,
    computed_finding_out,
    finding_out,
    pose_orientations_out,
)
from service.errors import MissingField, ServiceError, UnusableValue
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.operations.frame_estimates import estimate_answer
from service.operations.frame_network import Missing, network_of
from service.operations.joint_rows import read_joint_rows
from service.operations.meant_arms import MeantArm, meant_arm
from service.operations.stored import StoredDocument
from service.wire.arms import ReadArm
from service.wire.cells import ReadCell
from service.wire.frames import FramesBody
from service.wire.frames_request import ArmAt, FramesRequest
from service.wire.plain_relations import Relations
from service.wire.poses import checked_form, lock_findings

NESTED_FORM = "quaternion-wxyz"


def frames_answer(
    arms: Arms[ReadArm],
    cells: Cells,
    body: FramesBody,
    between: Callable[[], None] = lambda: None,
) -> dict[str, object]:
    """Return the answer to a body about frames.

    Parameters
    ----------
    between : called now and then in long work; may raise to give up.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : with ``where`` from the body's root.
    """
    asked = body.asked
    form = checked_form(NESTED_FORM if asked.form is None else asked.form)
    meant = [_meant(arms, entry, number) for number, entry in enumerate(asked.arms)]
    cell = _meant_cell(cells, asked, meant)
    units = _units(asked, meant, cell)
    own = body.relations(units)
    if not (own.of or meant or cell):
        raise UnusableValue(
            "there is nothing that frames could be known from",
            where=("relations",),
            value=[],
            way_out="give at least one of relations, arms and cell",
        )
    at, findings = _at_joints(units, asked.arms, meant)
    names = [name for pair in asked.find for name in (pair.of, pair.in_)]
    told_cell = None if cell is None else cell.read.cell
    network = network_of(own, at, told_cell, names, Missing(("arms",)))
    of, within = [pair.of for pair in asked.find], [pair.in_ for pair in asked.find]
    try:
        ways = network.ways(of, within)
    except KinematicsError as error:
        name = str(error.value)
        arm = name.partition(".")[0]
        if error.code == "unknown-frame" and "." in name and arm not in at:
            error.way_out = f'{error.way_out} Or is "{arm}" missing in "arms"?'
        raise error.below("find") from None
    loops, open_loops = loops_answer(network.graph, units)
    answer: dict[str, object] = {
        "units": units.name,
        **({"arms": [arm.identity() for arm in meant]} if meant else {}),
        **({"cell": cell_identity(cell)} if cell else {}),
        "answers": way_answers(ways, of, within, form, units),
        "loops": loops,
        "findings": [*_repaired(own, units), *findings, *open_loops],
    }
    if asked.estimate:
        answer["estimate"] = estimate_answer(network, of, within, form, units, between)
    return answer


def way_answers(
    ways: Ways,
    of: Sequence[str],
    within: Sequence[str],
    form: str,
    units: Units,
) -> list[dict[str, object]]:
    """Return for each pair its pose, the frames on the way, and the product in words."""
    positions = units.length_out(ways.poses[:, :3, 3]).tolist()
    values, from_lock = pose_orientations_out(units, form, ways.poses)
    orientations, locked = values.tolist(), (from_lock <= LOCK_NOTICE).tolist()
    products = ways.walks.products
    return [
        {
            "of": of[way],
            "in": within[way],
            "pose": {
                "position": positions[way],
                "orientation": {"form": form, "values": orientations[way]},
            },
            "path": path,
            "say": products[way],
            "findings": [
                finding_out(units, finding) for finding in lock_findings(ways.poses[way], form)
            ]
            if locked[way]
            else [],
        }
        for way, path in enumerate(ways.walks.frames)
    ]


def loops_answer(
    graph: FrameGraph, units: Units
) -> tuple[list[dict[str, object]], list[dict[str, object]]]:
    """Return every loop with what it is off by, and a finding if some do not close."""
    frames = graph.loops.walks.frames
    if not frames:
        return [], []
    position, angle = graph.closures
    off = list(map(max, position.tolist(), angle.tolist()))
    positions, angles = units.length_out(position).tolist(), units.angle_out(angle).tolist()
    answers: list[dict[str, object]] = [
        {
            "frames": around,
            "closure": {"position": positions[loop], "angle": angles[loop], "at": around[0]},
            "closes": off[loop] <= LOOP_CLOSED,
        }
        for loop, around in enumerate(frames)
    ]
    is_open = sum([value > LOOP_CLOSED for value in off])
    if not is_open:
        return answers, []
    worst = off.index(max(off))
    unit, measure = ("m", position) if position[worst] >= angle[worst] else ("rad", angle)
    say = (
        f"{is_open} of {len(off)} loops do not close within {{threshold}}: the "
        f"relations contradict each other; the worst, at {frames[worst][0]}, is "
        "off by {measure}"
    )
    finding = Finding(FINE, "loops-open", say, float(measure[worst]), LOOP_CLOSED, unit)
    return answers, [computed_finding_out(units, finding)]


def _meant(arms: Arms[ReadArm], entry: ArmAt, number: int) -> MeantArm:
    try:
        return meant_arm(arms, entry.arm)
    except KinematicsError as error:
        raise error.below("arms", number) from None
    except ServiceError as error:
        error.where = ("arms", number, *error.where)
        raise


def _meant_cell(
    cells: Cells, asked: FramesRequest, meant: Sequence[MeantArm]
) -> StoredDocument[ReadCell] | None:
    """Return the cell that is named, or else the one that the arms stand in."""
    if asked.cell is not None:
        try:
            stored = cells.get(asked.cell)
        except ServiceError as error:
            if error.code == "unknown-arm":
                error.status, error.location, error.where = 422, "body", ("cell",)
            raise
        stands = [arm.arm.cell for arm in meant if arm.arm.cell is not None]
        of_this = {cell.revision for cell in stands if cell.name == asked.cell}
        _refuse_several(asked.cell, of_this | {stored.record.revision})
        return stored
    named = {arm.arm.cell.name for arm in meant if arm.arm.cell is not None}
    if len(named) > 1:
        raise MissingField(
            f"the arms stand in several cells: {', '.join(sorted(named))}",
            where=("cell",),
            way_out='say with "cell" which one is meant',
        )
    for name in named:
        revisions = {arm.arm.cell.revision for arm in meant if arm.arm.cell is not None}
        _refuse_several(name, revisions)
        return cells.get(name, revisions.pop())
    return None


def _refuse_several(cell: str, revisions: Set[int]) -> None:
    """Refuse arms of which one stands in its cell as it is, another as it was.

    Raises
    ------
    UnusableValue
    """
    if len(revisions) > 1:
        told = " and ".join(map(str, sorted(revisions)))
        raise UnusableValue(
            f"revisions {told} of cell {cell} would be mixed",
            where=("arms",),
            value=sorted(revisions),
            way_out="ask for revisions of the arms that stand in one revision of the cell",
        )


def _units(
    asked: FramesRequest, meant: Sequence[MeantArm], cell: StoredDocument[ReadCell] | None
) -> Units:
    if asked.units is not None:
        return UNITS[asked.units]
    if cell is not None:
        return cell.read.units
    known = {arm.read.units.name for arm in meant}
    if len(known) == 1:
        return UNITS[known.pop()]
    raise MissingField(
        "units are not said, and are not guessed"
        if not known
        else f"the arms have different units: {', '.join(sorted(known))}",
        where=("units",),
        way_out=f"give one of {', '.join(UNITS)}",
    )


def _at_joints(
    units: Units, entries: Sequence[ArmAt], meant: Sequence[MeantArm]
) -> tuple[dict[str, tuple[ArmAtJoints, Missing]], list[dict[str, object]]]:
    """Return arms at their joint values by name, and what is worth knowing about those."""
    found: dict[str, tuple[ArmAtJoints, Missing]] = {}
    findings = []
    for number, (entry, arm) in enumerate(zip(entries, meant, strict=True)):
        name = arm.arm.name
        if name in found:
            raise UnusableValue(
                f"{name} is given twice, and can be in one posture only",
                where=("arms", number, "arm"),
                value=name,
                way_out="ask once for each posture",
            )
        joint_values = _joint_values(units, entry, arm, number)
        more = () if joint_values is None else travel_findings(arm.arm, joint_values)
        findings += [
            {**finding_out(units, finding), "arm": name} for finding in (*arm.repaired, *more)
        ]
        found[name] = (ArmAtJoints(arm.arm, joint_values), Missing(("arms", number, "joints")))
    return found, findings


def _joint_values(units: Units, entry: ArmAt, arm: MeantArm, number: int) -> FloatArray | None:
    given = entry.joints
    if given is None:
        return None
    if len(given) == 1 and isinstance(given[0], list):
        given = given[0]  # one vector in a list of vectors, as poses have it
    try:
        rows = read_joint_rows(arm.arm, units, [given], singularity=False)
    except ServiceError as error:
        error.errors = tuple(
            replace(detail, where=("arms", number, "joints", *detail.where[2:]))
            for detail in error.details()
        )
        raise
    joint_values: FloatArray = rows.values[0]
    return joint_values


def _repaired(own: Relations, units: Units) -> list[dict[str, object]]:
    told = [{**finding_out(units, finding), "relation": number} for number, finding in own.repaired]
    if own.more_repaired:
        say = f"{own.more_repaired} more relations were mended likewise"
        more = Finding(own.repaired[0][1].code, "input-repaired", say, 0.0, 0.0)
        told.append(finding_out(units, more))
    return told


def cell_identity(cell: StoredDocument[ReadCell]) -> dict[str, object]:
    """Return what leads back from an answer to the state of a cell it came from."""
    record = cell.record
    return {"name": record.name, "revision": record.revision, "digest": record.digest}
