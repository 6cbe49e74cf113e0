"""Views of a reach that has no size in them: a point, or a line.

Idea: where the joints move the point in one way only, what is seen is a line. One joint draws it as
it goes through its travel; a straight line has two ends; any other is drawn through sampled places,
each joined to the nearest that is left.

Source: nearest neighbours in turn. Not covered: lines that cross themselves, moved by several
joints.
"""

import numpy as np

from kinematics.envelope.measures import Measure
from kinematics.envelope.point_views import PointView
from kinematics.envelope.search import Search
from kinematics.envelope.shapes import Curve, View
from kinematics.envelope.tolerances import SOME_SIZE
from kinematics.number_checks import FloatArray


def flat_view(search: Search, view: PointView, kind: str, directions: FloatArray) -> View | None:
    """Return a view of no size; None where the reach has one.

    Parameters
    ----------
    view : of two coordinates; directions : (2, 3), theirs in the base.

    Examples
    --------
    A link that turns once: a circle, there and back.

    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.search import search_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> search, plan = search_of(arm, np.eye(4)), np.eye(3)[:2]
    >>> view = flat_view(search, search.along(plan)[0], "plan", plan)
    >>> view.area.value, view.box.round(9).tolist()
    (0.0, [[-0.4, -0.4], [0.4, 0.4]])
    """
    rank = search.rank(view)
    if rank == 2:
        return None
    joint_values = search.joint_values
    _, jacobians = view(joint_values[:64])
    moved = np.abs(jacobians * search.scales).max(axis=(0, 1))
    movers = np.nonzero(moved > SOME_SIZE * search.length)[0].tolist()
    chord, resolution = 0.0, None
    if rank == 0:
        points = view(joint_values[:1])[0]
    elif len(movers) == 1:
        (joint,) = movers
        path = np.repeat(joint_values[:1], _STEPS, axis=0)
        low, high = search.limits.lower[joint], search.limits.upper[joint]
        if search.arm.revolute_joints[joint]:
            high = min(high, low + 2.0 * np.pi)
        path[:, joint] = np.linspace(low, high, _STEPS)
        points = view(path)[0]
        chord = _sagitta(points)
    else:
        points, resolution = _through_samples(search, view)
        chord = resolution or 0.0
    there_and_back = np.concatenate([points, points[-2:0:-1]])
    curves = (Curve(there_and_back, outer=True),)
    return View(kind, curves, Measure(0.0, 0.0), resolution, chord, directions)


def _through_samples(search: Search, view: PointView) -> tuple[FloatArray, float | None]:
    """Return a line through places, (count, 2), and the widest gap of one that is not straight."""
    places = view(search.joint_values)[0]
    middle = places.mean(axis=0)
    way = np.linalg.svd(places[:512] - middle)[2][0]
    aside = (places - middle) @ np.array([-way[1], way[0]])
    if np.abs(aside).max() <= SOME_SIZE * search.length:

        def along(joint_values: FloatArray) -> tuple[FloatArray, FloatArray]:
            found, jacobians = view(joint_values)
            return (found @ way)[:, None], (way @ jacobians)[:, None]

        ends = [one.joint_values for one in search.extremes(("way",), along)]
        return view(np.array(ends))[0], None
    left = places[:_STEPS].copy()
    start = int(np.argmax(((left - middle) ** 2).sum(axis=1)))
    line = [left[start]]
    left = np.delete(left, start, axis=0)
    while len(left):
        nearest = int(np.argmin(((left - line[-1]) ** 2).sum(axis=1)))
        line.append(left[nearest])
        left = np.delete(left, nearest, axis=0)
    points = np.array(line)
    return points, float(np.hypot(*np.diff(points, axis=0).T).max())


def _sagitta(points: FloatArray) -> float:
    """Return how far a line of equal steps is from its chords at most."""
    if len(points) < 3:
        return 0.0
    bend = points[2:] - 2.0 * points[1:-1] + points[:-2]
    return float(np.hypot(*bend.T).max()) / 8.0


_STEPS = 513
"""Places along a line: a full circle is then drawn within 2e-5 of its radius."""
