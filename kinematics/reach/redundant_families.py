"""What is said of arms with a joint to spare: how far it can be moved, how closely it was tried.

Each stretch within travel is a family of its own, told from the joint that is held, with its best
posture for a witness. A stretch narrower than the step between held values may be missing; that is
said with every answer.

Source: none; the spans are found in inverse/redundant_spans.py.
Not covered: arms with more to spare, of whose families one curve is told (family_members.py).
"""

from kinematics.findings import FINE, Finding
from kinematics.inverse.redundant import Redundant
from kinematics.inverse.redundant_spans import spans_of
from kinematics.inverse.solve import Method
from kinematics.reach.family_members import families_told
from kinematics.reach.targets import Family
from kinematics.table import FloatArray


def spare_families(
    method: Method, redundant: Redundant, target: FloatArray, best: FloatArray
) -> tuple[Family, ...]:
    """Return the families of a target (4, 4), the tool in base, the one with most margin first.

    Where the search alone has found a posture, that of ``best`` (joints,) is followed.
    """
    unit = redundant.arm.joint_units[redundant.joint.number - 1]
    families = tuple(
        Family(tuple(joint + 1 for joint in span.moving), unit, span.interval, span.witness)
        for span in spans_of(redundant, target)
    )
    return families or families_told(method, target, best[None])


def resolution_of(redundant: Redundant) -> Finding:
    """Return what is to be known of answers: how far apart the values are that were tried."""
    joint = redundant.joint
    return Finding(
        FINE,
        "redundant-resolution",
        f"joint {joint.number} was tried at {len(joint.values)} values {{measure}} apart, and "
        "between those that lead there: a stretch narrower than that may be missing",
        joint.step,
        0.0,
        redundant.arm.joint_units[joint.number - 1],
    )
