"""A refusal of the core that is about what a query says.

Left out: refusals about bodies, where the core's own path leads.
"""

from kinematics.errors import KinematicsError
from service.details import Detail
from service.errors import ServiceError


def in_query(error: KinematicsError) -> ServiceError:
    """Return the refusal of the core as one of the query that holds what it is about.

    Examples
    --------
    >>> in_query(KinematicsError("no such tool", where=("tool",))).details()[0].location
    'query'
    """
    detail = Detail(error.code, error.say, error.where, "query", error.value, error.way_out)
    return ServiceError(error.say, errors=[detail], status=422)
