"""Which named frame a point is nearest to, how far, and whether it is above or below it.

Idea: people say where a tool is by what is near it. Frames that stand still stand still in the base
too, so their places are laid out once per arm, and a point is held against all of them at once.
Up is z of the world, which points away from the ground (ISO 9787).
Left out: frames that move, which an arm does not see; world and base, which name no place.
"""

from dataclasses import dataclass
from math import cos, radians

import numpy as np

from kinematics.arm import WORLD, Arm
from kinematics.table import FloatArray
from kinematics.transforms import inverse

UPRIGHT_SHARE = cos(radians(30.0))
"""Within 30 deg of upright a point is called above or below a frame: farther off one looks for it
beside the frame, not over it."""


@dataclass(frozen=True)
class NearFrame:
    """A frame near a point.

    Attributes
    ----------
    name : of the frame. distance : from its origin, metres.
    position_in_frame : (3,), the point in the frame, metres.
    height : of the point over the frame's origin, along z of the world, metres.
    is_upright : whether the point lies above or below the origin, rather than beside it.
    """

    name: str
    distance: float
    position_in_frame: FloatArray
    height: float
    is_upright: bool


class FramePlaces:
    """The named frames of an arm, laid out for the question which of them is nearest.

    Parameters
    ----------
    arm : its frames include those of its cell that stand still.

    Examples
    --------
    >>> from kinematics.arm import NamedFrame
    >>> from kinematics.table import Convention, Table
    >>> at = np.array([[1.0, 0, 0, 2], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]])
    >>> jig = NamedFrame(at, "base")
    >>> places = FramePlaces(Arm("press", Table(Convention.STANDARD, ()), frames={"jig": jig}))
    >>> near = places.nearest(np.array([2.0, 0.0, 0.5]))
    >>> near.name, near.distance, near.is_upright, near.height
    ('jig', 0.5, True, 0.5)
    """

    def __init__(self, arm: Arm) -> None:
        world_in_base = arm.base_in_frame(WORLD)
        self._up_in_base = inverse(world_in_base)[:3, 2]
        self._names = tuple(arm.frames)
        bases = [arm.base_in_frame(name) for name in self._names]
        self._base_in_frames = np.array(bases).reshape(-1, 4, 4)
        self._origins_in_base = np.array([inverse(base)[:3, 3] for base in bases]).reshape(-1, 3)

    def nearest(
        self, position: FloatArray, frame_in_base: FloatArray | None = None
    ) -> NearFrame | None:
        """Return the frame whose origin is nearest to a point, None where there are none.

        Of frames equally near the one that the arm names first.

        Parameters
        ----------
        position : (3,), metres, in the frame that is at ``frame_in_base``, (4, 4); None: the base.
        """
        if not self._names:
            return None
        point_in_base = position
        if frame_in_base is not None:
            point_in_base = frame_in_base[:3, :3] @ position + frame_in_base[:3, 3]
        offsets = point_in_base - self._origins_in_base
        distances = np.sqrt(np.einsum("ij,ij->i", offsets, offsets))
        index = int(np.argmin(distances))
        distance = float(distances[index])
        base_in_frame = self._base_in_frames[index]
        height = float(offsets[index] @ self._up_in_base)
        return NearFrame(
            self._names[index],
            distance,
            base_in_frame[:3, :3] @ point_in_base + base_in_frame[:3, 3],
            height,
            abs(height) >= UPRIGHT_SHARE * distance,
        )
