"""What people call an orientation form, and which of ours they mean.

Left out: the forms themselves (orientation_forms).
"""

import re
from collections.abc import Sequence
from typing import Final

from kinematics.known_names import nearest

# Words for one thing: turns about axes that stand still, and about those that move along.
_WORDS: Final = (
    (r"extrinsic|static|space|world|outer", "fixed"),
    (r"intrinsic|rotating|moving|body|relative|inner", "current"),
    (r"rotvec|axis-?angle|angle-?axis", "rotation-vector"),
    (r"^quat(ernion)?$", "quaternion-wxyz"),
)
_SEQUENCE: Final = re.compile(r"[xyz]{3}")


def way_out_of_unknown_form(name: str, forms: Sequence[str]) -> str:
    """Return the sentence that leads from a name that is no form to the forms it may mean.

    Parameters
    ----------
    name : as it was given.
    forms : the names there are.

    Returns
    -------
    way_out : one sentence; a bare sequence is not guessed to be about fixed or current axes.

    Source
    ------
    Words as in Diebel, Representing Attitude, 2006, and in textbooks on robots.

    Examples
    --------
    >>> forms = ["quaternion-wxyz", "rotation-vector", "zyx-fixed", "zyx-current"]
    >>> way_out_of_unknown_form("ZYX intrinsic", forms)
    'did you mean "zyx-current"?'
    >>> way_out_of_unknown_form("zyx", forms)
    'say about which axes: "zyx-fixed" or "zyx-current"'
    """
    said = re.sub(r"[\s_]+", "-", name[:100].strip().lower())
    for words, ours in _WORDS:
        said = re.sub(words, ours, said)
    if _SEQUENCE.fullmatch(said) and f"{said}-fixed" in forms:
        return f'say about which axes: "{said}-fixed" or "{said}-current"'
    close = said if said in forms else nearest(said, forms)
    if close is not None:
        return f'did you mean "{close}"?'
    return (
        "use matrix, quaternion-wxyz, quaternion-xyzw, rotation-vector, or a sequence with its "
        "axes such as xyz-fixed or zyx-current"
    )
