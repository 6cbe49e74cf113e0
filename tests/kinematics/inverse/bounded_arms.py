"""Arms with travel to test with."""

from dataclasses import replace

from kinematics.arm import Arm, CombinedTravel
from kinematics.table import Coupling, Row, Travel
from tests.kinematics.example_arms import SIX, arm_of


def bounded(rows: tuple[Row, ...], *bounds: tuple[float, float], **more: object) -> Arm:
    return arm_of(
        *(replace(row, travel=Travel(*ends)) for row, ends in zip(rows, bounds, strict=True)),
        **more,
    )


# Two joint values on one row each, one within bounds of a sum, a row without a value of its own.
COUPLED = arm_of(
    *(
        replace(row, travel=Travel(-2.4, 2.4), couplings=couplings)
        for row, couplings in zip(
            SIX, ((), (), (Coupling(2, -1.0),), (), (), (Coupling(5, 0.5),)), strict=True
        )
    ),
    combined_travel=(CombinedTravel({2: 1.0, 3: -1.0}, Travel(-1.5, 1.5)),),
)
