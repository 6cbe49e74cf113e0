"""Public functions of the core show one case to check by hand; pytest runs it with the module.

Left out: compiled functions, which work on arrays that their callers lay out and are held against
oracles by the tests of their modules; classes, which are shown where they are made or used.
"""

import ast

import pytest

from tests.architecture.imports import modules, tree_of

PARTS = {
    "inverse.attempts.search",
    "inverse.boxes.bench_for",
    "inverse.compromises.compromised",
    "inverse.cut_chain.best_cut",
    "inverse.descent_arms.slopes_of",
    "inverse.descent_arrays.desk_for",
    "inverse.descent_arrays.widened",
    "inverse.elimination_orders.order_of",
    "inverse.four_axes_arms.stays",
    "inverse.four_axes_arms.plane_mechanism",
    "inverse.four_axes_arms.level_palletiser",
    "inverse.regional_arm.regional_of",
    "inverse.settling.settled_on_table",
    "inverse.solution_table.solve_by",
    "inverse.solution_table.sought",
    "inverse.solution_table.nearest_by",
    "lost_motion.describe",
    "lost_motion.travel_and_speed",
    "reach.at_limits.with_ends_of_travel",
    "reach.cones.cone_of",
    "reach.family_members.with_witnesses",
    "reach.family_members.families_told",
    "reach.redundant_families.spare_families",
    "reach.redundant_families.resolution_of",
    "reach.spins.spin_of",
    "reading_words.plainest_first",
    "singular_kinds.kinds_of",
    "travel.approaches.with_approaches",
    "travel.breaks.out_of_reach",
    "travel.in_joints.joint_trail",
    "travel.on_line.bench_for",
    "travel.tracking.room_for",
}
"""Parts of one solver or answer: their arguments are brought about by it alone, and the example of
the whole runs them. New functions do not come in here without such a reason."""


def public_functions(module: str) -> list[ast.FunctionDef]:
    """Return the public functions of a module that are plain Python."""
    return [
        node
        for node in tree_of(module).body
        if isinstance(node, ast.FunctionDef)
        and not node.name.startswith("_")
        and not any("compiled" in ast.unparse(by) for by in node.decorator_list)
    ]


@pytest.mark.parametrize("module", [name for name in modules() if name.startswith("kinematics.")])
def test_public_functions_show_an_example(module: str) -> None:
    for function in public_functions(module):
        shown = ">>>" in (ast.get_docstring(function) or "")
        name = f"{module}.{function.name}".removeprefix("kinematics.")
        assert shown != (name in PARTS), name


def test_what_is_left_out_is_there() -> None:
    functions = {
        f"{module}.{function.name}".removeprefix("kinematics.")
        for module in modules()
        for function in public_functions(module)
    }
    assert functions >= PARTS
    assert len(functions) > 250
