"""A route whose handler takes the request and returns the answer, with nothing in between.

Every handler here reads its request itself, so that a refusal can say which value is wrong and
come in the format asked for. What the framework would prepare for a handler is not used, and would
take a third of the time of a short answer. Nor is a path matched against the patterns of dozens
of other routes where how it begins and ends already tells that it is none of theirs.
"""

from functools import cached_property
from typing import ClassVar, Literal

from fastapi.routing import APIRoute
from starlette.requests import Request
from starlette.responses import Response
from starlette.routing import Match
from starlette.types import Receive, Scope, Send

from service.readiness import Kernels


class DirectRoute(APIRoute):
    """Hands the request straight to the handler; refusals are the app's to answer, as ever."""

    kernels: ClassVar[Literal["postures", "relations", "reach"] | None] = None
    """The kernels the handler calls; it is not called before they are ready."""

    def matches(self, scope: Scope) -> tuple[Match, Scope]:
        """Say whether a request is for this route."""
        begins, ends = self._begins_and_ends
        path = scope["path"]
        if not (path.startswith(begins) and path.endswith(ends)):
            return Match.NONE, {}
        return super().matches(scope)

    @cached_property
    def _begins_and_ends(self) -> tuple[str, str]:
        """What stands before the first and behind the last parameter of the path."""
        return self.path.partition("{")[0], self.path.rpartition("}")[2]

    async def handle(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Answer one request; another method than the route's is the framework's to refuse."""
        if scope["method"] not in (self.methods or ()):
            await super().handle(scope, receive, send)
            return
        if self.kernels is not None:
            kernels: Kernels = getattr(scope["app"].state.readiness, self.kernels)
            if not kernels.are_ready:
                await kernels.wait()
        answer: Response = await self.endpoint(Request(scope, receive, send))
        await answer(scope, receive, send)


class PostureRoute(DirectRoute):
    """A direct route that answers about postures of arms."""

    kernels = "postures"


class RelationRoute(DirectRoute):
    """A direct route that answers about rotations and frames."""

    kernels = "relations"


class ReachRoute(DirectRoute):
    """A direct route that answers whether targets can be reached."""

    kernels = "reach"
