"""What people call an orientation form leads to the one they mean, and to none they may not."""

import pytest

from kinematics.errors import InvalidOrientation
from kinematics.form_names import way_out_of_unknown_form
from kinematics.orientation_forms import FORMS, SEQUENCES, shape_of


@pytest.mark.parametrize(
    ("name", "meant"),
    [
        ("zyx-curent", "zyx-current"),
        ("ZYX-CURRENT", "zyx-current"),
        ("zyx current", "zyx-current"),
        ("zyx_intrinsic", "zyx-current"),
        ("zyx-moving", "zyx-current"),
        ("xyz-extrinsic", "xyz-fixed"),
        ("xyz static", "xyz-fixed"),
        ("rotvec", "rotation-vector"),
        ("axis-angle", "rotation-vector"),
        ("quaternion", "quaternion-wxyz"),
        ("quat", "quaternion-wxyz"),
        ("quaternion-xwyz", "quaternion-xyzw"),
        ("Matrix", "matrix"),
        ("matirx", "matrix"),
    ],
)
def test_the_form_that_is_meant(name: str, meant: str) -> None:
    assert way_out_of_unknown_form(name, FORMS) == f'did you mean "{meant}"?'


@pytest.mark.parametrize("sequence", SEQUENCES)
def test_a_bare_sequence_is_not_guessed(sequence: str) -> None:
    for name in (sequence, sequence.upper()):
        said = way_out_of_unknown_form(name, FORMS)
        assert f'"{sequence}-fixed" or "{sequence}-current"' in said


@pytest.mark.parametrize("name", ["", "?", "x" * 10_000, "\n", "zyx-" * 50])
def test_what_nobody_can_have_meant(name: str) -> None:
    assert way_out_of_unknown_form(name, FORMS).startswith("use matrix, quaternion-wxyz")


def test_the_refusal_of_a_form_says_it() -> None:
    with pytest.raises(InvalidOrientation) as caught:
        shape_of("xxy-fixed")
    assert caught.value.way_out.startswith('did you mean "')
    assert caught.value.way_out.endswith('-fixed"?')
