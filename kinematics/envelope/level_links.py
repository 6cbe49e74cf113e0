"""How near to an axis and how far from it links bring a point that all turn about its direction.

Idea: whatever is nearest or farthest has each joint at an end of its travel or free, and a joint is
free there only if turning it changes nothing at first: then its axis lies on the line from axis 1
to the point. So the axes of all free joints lie on that line, what is between them is stiff, and
only its signs are left to choose. A place on axis 1 itself is nearest whatever the joints do. Of
the postures that reach it take the one with the first joint as low as can be, of those the one with
the second, and so on: its first free joint can sink no further, so the axes of all other free ones
lie on one line through axis 1 again, and a triangle closes it. All of these postures are listed.
Each is brought into travel, so that none tells what is not reached; of the one sought that changes
nothing.

Source: necessary conditions of Karush 1939 and John 1948; the nearest and farthest of links without
limits as in Gupta and Roth 1982. Not covered: slides across the axis, joints tied to others.
"""

from dataclasses import dataclass
from itertools import product

import numpy as np

from kinematics.number_checks import FloatArray

MOST_LINKS = 5
"""Joints beside joint 1: with five, 243 ways to hold some of them are looked at, in 20 ms."""

_FREE = 2


@dataclass(frozen=True)
class LevelLinks:
    """Links in a plane across axis 1, from there to the point.

    Attributes
    ----------
    steps : (joints + 1, 2), m, from axis to axis and on to the point, all joints at angle 0.
    lower, upper : (joints,), rad, of the angle by which each turns all that is beyond it.

    Examples
    --------
    Links of 0.5 and 0.3 m: folded no further than square.

    >>> links = LevelLinks(np.array([[0.5, 0.0], [0.3, 0.0]]), np.zeros(1), np.full(1, np.pi / 2))
    >>> links.radii(links.nearest_and_farthest()).round(12)
    array([0.58309519, 0.8       ])
    """

    steps: FloatArray
    lower: FloatArray
    upper: FloatArray

    def places(self, angles: FloatArray) -> FloatArray:
        """Return where angles (count, joints) bring the point, (count, 2), from axis 1."""
        turned = np.concatenate([np.zeros((len(angles), 1)), np.cumsum(angles, axis=1)], axis=1)
        cosine, sine = np.cos(turned), np.sin(turned)
        x, y = self.steps.T
        return np.stack([cosine @ x - sine @ y, sine @ x + cosine @ y], axis=1)

    def radii(self, angles: FloatArray) -> FloatArray:
        """Return how far that is from axis 1, (count,)."""
        radii: FloatArray = np.hypot(*self.places(angles).T)
        return radii

    def nearest_and_farthest(self) -> FloatArray:
        """Return angles that bring the point nearest to axis 1 and farthest from it, (2, joints).

        Their radii are exact but for rounding, some 1e-15 of the steps' sum.
        """
        count = len(self.lower)
        listed = [_Stiff(self, held).candidates() for held in product(range(3), repeat=count)]
        angles = self._in_travel(np.concatenate(listed))
        radii = self.radii(angles)
        return angles[[int(radii.argmin()), int(radii.argmax())]]

    def _in_travel(self, angles: FloatArray) -> FloatArray:
        """Return angles (count, joints) with whole turns added, or ends of travel in their place.

        Of an angle that no turn brings into travel the end nearer to it.
        """
        beyond = np.mod(angles - self.lower, 2.0 * np.pi)
        over, short = beyond - (self.upper - self.lower), 2.0 * np.pi - beyond
        end = np.where(over < short, self.upper, self.lower)
        return np.where(over > 0.0, end, np.minimum(self.lower + beyond, self.upper))


class _Stiff:
    """Links of which some joints are held, so that only a few stiff ones are left.

    Parameters
    ----------
    held : of each joint 0 for the lower end of its travel, 1 for the upper, or ``_FREE``.
    """

    def __init__(self, links: LevelLinks, held: tuple[int, ...]) -> None:
        ends = np.stack([links.lower, links.upper, np.zeros(len(held))], axis=1)
        self._angles = ends[np.arange(len(held)), held]
        self._free = [joint for joint, how in enumerate(held) if how == _FREE]
        # Each as a complex number where the joint that it begins at is at angle 0, and by how much
        # held joints turn what follows.
        (*steps,) = (links.steps[:, 0] + 1j * links.steps[:, 1]).tolist()
        sides, turns = [steps[0]], [0.0]
        for joint, step in enumerate(steps[1:]):
            if held[joint] == _FREE:
                sides.append(step)
                turns.append(0.0)
            else:
                turns[-1] += float(self._angles[joint])
                sides[-1] += step * np.exp(1j * turns[-1])
        self._lengths, self._directions = np.abs(sides), np.angle(sides)
        self._turns = np.array(turns)

    def candidates(self) -> FloatArray:
        """Return angles (count, joints) that may bring the point nearest or farthest."""
        first = float(self._directions[0])
        signs = _signs(len(self._free))
        ways = [np.where(signs < 0.0, first + np.pi, first)]
        if len(self._free) >= 2:
            ways.append(self._closed(first))
        return self._angles_for(np.concatenate(ways))

    def _closed(self, first: float) -> FloatArray:
        """Return the directions of stiff links (count, free) that lead back to axis 1.

        The first two and the line of all others are the sides of a triangle.
        """
        near, far, *others = self._lengths.tolist()
        signs = _signs(len(others) - 1)
        signs = np.concatenate([np.ones((len(signs), 1)), signs], axis=1)
        line = signs @ np.array(others)
        side = np.abs(line)
        # Half angles keep the digits of triangles that are nearly flat; those that do not close
        # are left flat.
        across = np.maximum((side - near + far) * (side + near - far), 0.0)
        along = np.maximum((near + far - side) * (near + far + side), 0.0)
        inner = 2.0 * np.arctan2(np.sqrt(across), np.sqrt(along))
        found = []
        for mirrored in (1.0, -1.0):
            second = first + np.pi + mirrored * inner
            back = -(near * np.exp(1j * first) + far * np.exp(1j * second))
            third = np.where(line < 0.0, np.angle(-back), np.angle(back))
            rest = np.where(signs < 0.0, third[:, None] + np.pi, third[:, None])
            found.append(np.concatenate([second[:, None], rest], axis=1))
        return np.concatenate(found)

    def _angles_for(self, ways: FloatArray) -> FloatArray:
        """Return angles (count, joints) that bring stiff links into directions (count, free)."""
        turned = ways - self._directions[1:]
        before = np.concatenate([np.zeros((len(ways), 1)), turned[:, :-1]], axis=1)
        angles = np.tile(self._angles, (len(ways), 1))
        angles[:, self._free] = turned - before - self._turns[:-1]
        return angles


def _signs(count: int) -> FloatArray:
    """Return all ways to sign so many numbers, (2**count, count)."""
    return np.array(list(product((1.0, -1.0), repeat=count))).reshape(2**count, count)
