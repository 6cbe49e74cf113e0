"""The kinds of surveys there are, by name; a new one is a class of its own and a line here.

Left out: what they do.
"""

from collections.abc import Mapping

from service.surveys.envelopes import Envelopes
from service.surveys.kinds import Kind
from service.surveys.reach_checks import ReachChecks
from service.surveys.samples import Samples

_ALL: tuple[Kind, ...] = (ReachChecks(), Samples(), Envelopes())
SURVEY_KINDS: Mapping[str, Kind] = {kind.name: kind for kind in _ALL}
