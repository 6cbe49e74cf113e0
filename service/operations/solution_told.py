"""One solution as it is answered, whoever has found it.

Left out: its singularity and findings, which come as they are told (reach_told.py).
"""

from math import isfinite


def solution_out(
    joints: list[float],
    margin: float,
    branch: str,
    singularity: dict[str, object] | None,
    errors: tuple[float, float],
    findings: list[dict[str, object]],
) -> dict[str, object]:
    """Return one solution as answered; joint values and errors in the user's units already."""
    return {
        "joints": joints,
        "margin": margin if isfinite(margin) else None,
        "branch": branch,
        "singularity": singularity,
        "position_error": errors[0],
        "angle_error": errors[1],
        "findings": findings,
    }
