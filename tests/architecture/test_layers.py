"""The house held to its plan: imports point down, the core is alone, modules stay small.

Everything is read from the text of the modules; only the test of lone imports runs them.
"""

import ast
import graphlib
import inspect
import re
import subprocess
import sys
from html import unescape

import pytest

from kinematics import errors as core_errors
from service import errors as service_errors
from service.problems import ANSWERS, KINDS
from service.web import pages
from tests.architecture.imports import (
    PACKAGES,
    ROOT,
    imported_by,
    modules,
    others,
    ours,
    tree_of,
    within,
)

# The core, layer by layer: a module imports from its own layer or from those above it here.
LAYERS = (
    ("errors", "findings", "known_names", "tolerances"),
    ("number_checks", "kernels", "kernels.compiler", "kernels.workspace"),
    (
        "kernels.sine_cosine",
        "kernels.forward",
        "kernels.jacobian",
        "kernels.decomposition",
        "kernels.quaternions",
        "kernels.angles",
        "kernels.travel",
        "kernels.judgement",
        "kernels.whole_turns",
        "kernels.best_postures",
        "kernels.branch_signs",
        "kernels.rotation_matrices",
        "kernels.frame_graph",
        "kernels.frame_poses",
        "kernels.given_poses",
    ),
    ("form_names", "orientation_findings"),
    (
        "rigidity",
        "rotations",
        "angle_triples",
        "orientation_forms",
        "orientation_input",
        "transforms",
    ),
    (
        "rotation_steps",
        "rewritten_steps",
        "many_rotations",
        "orientation_batches",
        "pose_batches",
        "block_system",
    ),
    ("screen_rotations", "screen_readings", "reading_words"),
    ("constant_offsets", "next_readout", "readouts", "orientation_guesses"),
    ("table", "drive_map", "in_cell", "arm", "cell"),
    ("chain", "travel_limits", "digests", "table_conversion", "nearest_frame"),
    ("outline", "travel_used"),
    ("motion_profiles",),
    ("connections",),
    ("arm_relations", "frames"),
    ("frame_residuals",),
    ("frame_estimate",),
    ("frame_suspects",),
    ("jacobian",),
    (
        "peak_demand",
        "task_space",
        "singularity",
        "singular_kinds",
        "lost_motion",
        "joint_speeds",
    ),
    # Joint motions for a place or pose: lines in space and three joints of them.
    (
        "inverse",
        "inverse.tolerances",
        "inverse.kernel_numbers",
        "inverse.screws",
        "inverse.geometry",
        "inverse.trig_roots",
        "inverse.regional_pairs",
        "inverse.regional_rows",
        "inverse.regional_equations",
        "inverse.regional_closing",
        "inverse.regional_slides",
        "inverse.regional",
        "inverse.regional_nearest",
        "inverse.regional_places",
    ),
    # Six joints with a special triple: taken apart, closed, brought onto their targets.
    ("inverse.found", "inverse.landing", "inverse.measured", "inverse.polish", "inverse.twins"),
    ("inverse.regional_arm",),
    # Small matrices in compiled code, lines as fifteen numbers, six equations in three joints.
    ("inverse.small_matrices", "inverse.line_forms"),
    ("inverse.elimination_sides", "inverse.elimination_companion"),
    ("inverse.elimination_pencil", "inverse.elimination_postures"),
    ("inverse.elimination_orders",),
    # Downhill to a target, and where to begin.
    ("inverse.descent_arrays", "inverse.descent", "inverse.starts"),
    (
        "inverse.triple",
        "inverse.peel",
        "inverse.outer_answers",
        "inverse.closing",
        "inverse.solution_table",
        "inverse.special_triple",
    ),
    # Six joints of which some slide, and tables that are nearly special.
    ("inverse.candidates", "inverse.slide_rings", "inverse.slide_equation"),
    ("inverse.elimination", "inverse.two_slides", "inverse.three_slides"),
    ("inverse.measured_tables", "inverse.six_joints"),
    # Whatever has no closed form: many starts. Arms that turn about one direction.
    ("inverse.attempts",),
    ("inverse.descent_arms", "inverse.iterative"),
    # Boxes of joint values that miss a target.
    ("inverse.box_tests", "inverse.boxes", "inverse.cut_chain", "inverse.branch_and_bound"),
    ("inverse.planar", "inverse.level_wrist", "inverse.four_axes_postures", "inverse.settling"),
    ("inverse.four_axes_arms", "inverse.four_axes"),
    # Joint motions that leave the tool where it is.
    ("inverse.continuation", "inverse.self_motions"),
    ("inverse.families",),
    # Which method answers for which arm, and joint values from motions.
    ("inverse.drive", "inverse.lost_rank", "inverse.several", "inverse.at_once"),
    # One joint held at many values, the other six solved; cones met by search.
    ("inverse.held_values", "inverse.locked", "inverse.redundant_paths", "inverse.cone_search"),
    ("inverse.held_joint", "inverse.redundant_stretches"),
    ("inverse.redundant",),
    ("inverse.redundant_spans", "inverse.upright_spins"),
    ("inverse.compromises",),
    ("inverse.missing_joint", "inverse.last_turn"),
    ("inverse.few_joints",),
    ("inverse.solve",),
    # Verdicts on targets: what is asked and answered, the parts of an arm, and how they are made.
    (
        "reach",
        "reach.tolerances",
        "reach.targets",
        "reach.arm_parts",
        "reach.aligned_joints",
        "reach.ways",
    ),
    ("reach.branches", "reach.bounds", "reach.durations", "reach.family_members"),
    ("reach.redundant_families",),
    ("reach.verdicts",),
    ("reach.near_enough", "reach.at_limits", "reach.last_proof", "reach.listing", "reach.misses"),
    ("reach.reasons", "reach.one_target"),
    ("reach.answers",),
    ("reach.spins",),
    ("reach.cones",),
    ("reach.checks", "reach.first_checks"),
    # What an arm can reach at all: samples, and the curves around it.
    ("reach.travel_region",),
    ("wandering",),
    ("reach.samples",),
    ("reach.sample_summary",),
    # What is reached at all: exact regions of two joints, searches of any, what both are told as.
    ("envelope", "envelope.tolerances"),
    ("envelope.pair_region", "envelope.level_links"),
    ("envelope.measures",),
    ("envelope.shapes", "envelope.plan_axes", "envelope.point_views", "envelope.wrist"),
    ("envelope.plan_marks",),
    ("envelope.pair_of_arm", "envelope.outlines", "envelope.descents"),
    ("envelope.section", "envelope.crossings", "envelope.grid_reach", "envelope.farthest"),
    ("envelope.proved_radii",),
    ("envelope.pair_views", "envelope.grid_chords", "envelope.draws", "envelope.search"),
    ("envelope.ring", "envelope.grid_outlines"),
    ("envelope.sampled_views", "envelope.flat_views"),
    ("envelope.inquiry",),
    ("envelope.known_structures", "envelope.level", "envelope.searched"),
    ("envelope.envelope",),
    ("envelope.in_parts",),
    # Moves from place to place: the question and answer, lines and postures held against them, one
    # leg followed, what is told of it, whole courses.
    ("travel", "travel.above_zero", "travel.tolerances", "travel.moves", "travel.small_systems"),
    ("travel.to_targets",),
    ("travel.lines", "travel.on_line", "travel.folds"),
    ("travel.tracking",),
    ("travel.extremes", "travel.trails"),
    ("travel.arm_on_lines",),
    ("travel.straight", "travel.in_joints", "travel.told_legs", "travel.breaks"),
    ("travel.courses",),
    ("travel.approaches", "travel.first_courses"),
    ("posture_reader", "sampled_motion", "warm_up"),
)

# The core computes: with numpy, scipy and the compiler, and with nothing that reaches outside.
CORE_IMPORTS = {
    *("numpy", "scipy", "numba"),
    *("collections", "dataclasses", "enum", "functools", "hashlib", "itertools", "json", "math"),
    "cmath",
    *("difflib", "numbers", "re", "typing", "weakref"),
    # What a cache of machine code that cannot be read or written fails with, and what its code
    # was made from.
    *("contextlib", "inspect", "pickle", "pathlib"),
    # Which part warm_up is to compile when it is run as a command.
    "sys",
    # What keeps the threads that share the arrays of one posture_reader out of each other's way.
    "threading",
}

MOST_LINES = 330
MOST_BODY_LINES = 45
WEB = ("starlette", "fastapi", "uvicorn")


def of(package: str) -> list[str]:
    return [module for module in modules() if within(module, (package,))]


def test_all_modules_are_found() -> None:
    assert len(of("kinematics")) >= 25
    assert len(of("service")) >= 50


# --- the core ------------------------------------------------------------------------------


def layer_of(module: str) -> int:
    name = module.removeprefix("kinematics.")
    layers = [number for number, names in enumerate(LAYERS) if name in names]
    assert len(layers) == 1, f"{module} stands in {len(layers)} layers of the plan"
    return layers[0]


CORE = [module for module in of("kinematics") if module != "kinematics"]


@pytest.mark.parametrize("module", CORE)
def test_imports_of_the_core_point_down(module: str) -> None:
    for imported in ours(module):
        assert within(imported, ("kinematics",)), f"{module} imports {imported}"
        assert layer_of(imported) <= layer_of(module), f"{module} imports {imported}, above it"


@pytest.mark.parametrize("module", of("kinematics"))
def test_the_core_reaches_for_nothing_outside(module: str) -> None:
    assert others(module) <= CORE_IMPORTS


def test_kernels_know_arrays_alone() -> None:
    """They take plain arrays: of the core they know the name of an array's type, no arm."""
    for module in of("kinematics.kernels"):
        outside = {name for name in ours(module) if not within(name, ("kinematics.kernels",))}
        assert outside <= {"kinematics.number_checks"}
        for node in ast.walk(tree_of(module)):
            if isinstance(node, ast.ImportFrom) and node.module == "kinematics.number_checks":
                assert [alias.name for alias in node.names] == ["FloatArray"]


def test_no_imports_go_in_a_circle() -> None:
    graph = {module: ours(module) & set(modules()) - {module} for module in modules()}
    assert len(list(graphlib.TopologicalSorter(graph).static_order())) == len(graph)


# --- the service ---------------------------------------------------------------------------

# Who must not import what; a name ending in a star stands for all below it.
FORBIDDEN = {
    "service.operations": (*WEB, "sqlalchemy", "alembic", "sqlite3", "service.routes"),
    "service.storage": (*WEB, "pydantic", "service.wire", "service.routes", "kinematics"),
    "service.wire": ("fastapi", "sqlalchemy", "service.routes", "service.operations"),
    "service.routes": ("sqlalchemy", "sqlite3", "alembic"),
    "service.convert": (*WEB, "pydantic", "service"),
    "service.live": (*WEB, "pydantic", "sqlalchemy", "sqlite3", "service.routes"),
    "service.web": ("sqlalchemy", "kinematics", "service.operations", "service.routes"),
}


@pytest.mark.parametrize("package", FORBIDDEN)
def test_what_each_part_of_the_service_leaves_to_others(package: str) -> None:
    assert of(package)
    for module in of(package):
        bad = [name for name in imported_by(module) if within(name, FORBIDDEN[package])]
        assert not bad, f"{module} imports {bad}"


def test_only_the_app_and_the_command_see_concrete_storage() -> None:
    """All others know the ports: what a store does, not which one it is."""
    seeing = {
        module
        for module in of("service")
        for name in ours(module)
        if within(name, ("service.storage",))
        and name != "service.storage.ports"
        and not within(module, ("service.storage",))
    }
    assert seeing == {"service.app", "service.stored_commands"}


def test_nothing_below_imports_the_app() -> None:
    assert {m for m in modules() if "service.app" in ours(m)} == {"service.server"}


# --- mathematics stays in the core ---------------------------------------------------------

ANGLES = {
    *("sin", "cos", "tan", "asin", "acos", "atan", "atan2", "arcsin", "arccos", "arctan"),
    *("arctan2", "hypot", "deg2rad", "rad2deg", "radians", "degrees", "cross", "dot", "matmul"),
    *("einsum", "linalg", "pi", "tau", "inv", "svd", "norm", "trace", "det"),
}


def arithmetic_of(module: str) -> set[str]:
    """Return the products of matrices and the functions of angles that a module uses."""
    found = set()
    for node in ast.walk(tree_of(module)):
        if isinstance(node, ast.BinOp | ast.AugAssign) and isinstance(node.op, ast.MatMult):
            found.add(ast.unparse(node))
        elif isinstance(node, ast.Attribute) and node.attr in ANGLES:
            of_numbers = isinstance(node.value, ast.Name) and node.value.id in ("np", "math")
            if of_numbers or node.attr in ("linalg", "svd"):
                found.add(ast.unparse(node))
        elif isinstance(node, ast.ImportFrom) and node.module in ("math", "numpy", "numpy.linalg"):
            found |= {alias.name for alias in node.names if alias.name in ANGLES}
    return found


@pytest.mark.parametrize("module", of("service"))
def test_the_service_knows_no_mathematics(module: str) -> None:
    """Poses and angles are computed in the core, and units converted in one module."""
    if module == "service.convert":
        return
    assert not arithmetic_of(module)
    assert not others(module) & {"scipy", "numba"}


def test_the_search_finds_what_it_is_made_for() -> None:
    assert {"np.deg2rad", "np.rad2deg"} <= arithmetic_of("service.convert")
    assert any("@" in expression for expression in arithmetic_of("kinematics.jacobian"))
    assert "np.linalg" in arithmetic_of("kinematics.peak_demand") | arithmetic_of(
        "kinematics.joint_speeds"
    )
    assert "base_in_frame @ x_in_base" in arithmetic_of("kinematics.transforms")


# --- size, lone imports --------------------------------------------------------------------


@pytest.mark.parametrize("module", modules())
def test_no_module_is_two(module: str) -> None:
    assert len(modules()[module].read_text(encoding="utf-8").splitlines()) <= MOST_LINES


@pytest.mark.parametrize("module", modules())
def test_no_function_is_two(module: str) -> None:
    for node in ast.walk(tree_of(module)):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            body = node.body[1:] if ast.get_docstring(node) else node.body
            if body:
                length = int(body[-1].end_lineno or 0) - body[0].lineno + 1
                assert length <= MOST_BODY_LINES, f"{node.name} of {module}"


@pytest.mark.parametrize("module", modules())
def test_a_module_says_its_idea_first(module: str) -> None:
    if not modules()[module].read_text(encoding="utf-8"):
        return  # an empty package file has nothing to say
    assert len((ast.get_docstring(tree_of(module)) or "").split()) >= 4


def test_names_say_what_is_inside() -> None:
    for module in modules():
        assert not re.search(r"(^|[._])(utils?|helpers?|managers?|common|misc)([._]|$)", module)


LONE_IMPORTS = """
import importlib, sys, traceback
failed = 0
for name in sys.argv[1:]:
    for loaded in [m for m in sys.modules if m.split(".")[0] in ("kinematics", "service")]:
        del sys.modules[loaded]
    try:
        importlib.import_module(name)
    except Exception:
        failed += 1
        print(name)
        traceback.print_exc()
sys.exit(1 if failed else 0)
"""


def test_each_module_imports_alone() -> None:
    """Before any of the others: no module relies on another having been imported first.

    Two of them do something when imported, which is what they are for: the command, and the
    migration's steps.
    """
    alone = [m for m in modules() if m != "service.__main__" and ".versions." not in m]
    assert len(alone) >= 75
    halves = [
        subprocess.Popen(
            [sys.executable, "-W", "error", "-c", LONE_IMPORTS, *half],
            cwd=ROOT,
            stdout=subprocess.PIPE,
            stderr=subprocess.STDOUT,
            text=True,
        )
        for half in (alone[::2], alone[1::2])
    ]
    told = [process.communicate(timeout=120)[0] for process in halves]
    assert [process.returncode for process in halves] == [0, 0], "".join(told)


# --- what is documented --------------------------------------------------------------------


def lines_of_problems() -> dict[str, list[str]]:
    """Return the cells of each line of the page of problems by the line's anchor."""
    lines = re.findall(r'<tr id="([^"]+)">(.*?)</tr>', pages._problems_html().decode())
    cells = {anchor: re.findall(r"<td>(.*?)</td>", line) for anchor, line in lines}
    assert len(cells) == len(lines) == len(KINDS) + len(ANSWERS)
    return {anchor: [unescape(cell) for cell in line] for anchor, line in cells.items()}


@pytest.mark.parametrize("code", KINDS)
def test_every_code_is_on_the_page_of_problems(code: str) -> None:
    kind = KINDS[code]
    shown, number, statuses, title = lines_of_problems()[code]
    assert (shown, number, title) == (code, str(kind.number), kind.title)
    told = [int(status) for status in statuses.split(", ")]
    assert told == list(kind.statuses)


@pytest.mark.parametrize("number", ANSWERS)
def test_every_code_of_an_answer_is_on_the_page_of_problems(number: int) -> None:
    assert lines_of_problems()[f"code-{number}"] == [str(number), ANSWERS[number]]


@pytest.mark.parametrize("house", [core_errors, service_errors], ids=lambda house: house.__name__)
def test_every_error_is_drawn_says_when_and_has_a_known_code(house: object) -> None:
    classes = [
        kind
        for _, kind in inspect.getmembers(house, inspect.isclass)
        if issubclass(kind, Exception) and kind.__module__ == house.__name__  # type: ignore[attr-defined]
    ]
    assert len(classes) >= 12
    for kind in classes:
        assert re.search(rf"\b{kind.__name__}\b", house.__doc__ or ""), kind
        assert kind.__doc__, kind
        assert kind.code in KINDS, kind


def test_packages_are_the_two_of_the_plan() -> None:
    assert PACKAGES == ("kinematics", "service")
    for package in PACKAGES:
        assert (ROOT / package / "__init__.py").exists()
