"""The kinds of surveys there are, by name; a new one is a class of its own and a line here.

Left out: what they do.
"""

from collections.abc import Mapping

from service.surveys.kinds import Kind
from service.surveys.reach_checks import ReachChecks

_ALL: tuple[Kind, ...] = (ReachChecks(),)
SURVEY_KINDS: Mapping[str, Kind] = {kind.name: kind for kind in _ALL}
