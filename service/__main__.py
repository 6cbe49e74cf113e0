"""The command ``armspan``: serve, simulate, and stored arms and cells from the command line.

Left out: what the subcommands do.
"""

import argparse
import asyncio
import math
import sys
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from service.errors import ServiceError
from service.server import run
from service.settings import Settings, WrongSetting
from service.stored_commands import add_stored, list_stored

_WRONG_USE = 2


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; return its exit code (2: used wrongly, 1: did not work)."""
    given = vars(_parser().parse_args(arguments))
    if given["command"] == "simulate":
        return _simulate(given)
    command, kind = given.pop("command"), given.pop("kind", "arm")
    files = given.pop("files", [])
    try:
        settings = Settings.from_environment(given)
    except WrongSetting as error:
        print(f"armspan: {error}", file=sys.stderr)
        return _WRONG_USE
    if command == "serve":
        return run(settings)
    try:
        if command == "add":
            return add_stored(settings, kind, files, sys.stdout)
        return list_stored(settings, kind, sys.stdout)
    except ServiceError as error:
        print(f"armspan: {error.say}", file=sys.stderr)
        return 1


def _simulate(given: Mapping[str, Any]) -> int:
    # Who serves needs neither a client nor what it brings along.
    from service.simulation.sending import Simulation, simulate

    asked = Simulation(
        url=given["url"],
        arms=tuple(given["arms"] or ()),
        rate_hz=given["rate"],
        seed=given["seed"],
        speed=given["speed"],
        duration_s=given["duration"],
    )
    try:
        return asyncio.run(simulate(asked, sys.stdout))
    except KeyboardInterrupt:
        return 0


def _between(least: float, most: float) -> Callable[[str], float]:
    """Return what reads a number above ``least`` and up to ``most``."""

    def read(text: str) -> float:
        value = float(text)
        if not least < value <= most:
            raise ValueError(text)
        return value

    # What argparse calls it where it refuses a text.
    read.__name__ = f"number above {least:g} and up to {most:g}"
    return read


def _add_simulate(commands: Any) -> None:
    simulate = commands.add_parser(
        "simulate",
        help="move arms of a running service, marked as simulated",
        description="Send joint values of smooth motions within travel and top speeds to a "
        "running service, until real values of the arm come. Ends with Ctrl-C.",
        allow_abbrev=False,
    )
    simulate.set_defaults(command="simulate")
    usual = "http://127.0.0.1:8017"
    simulate.add_argument("--url", default=usual, help=f"address of the service ({usual})")
    simulate.add_argument(
        "--arm", action="append", dest="arms", help="name of an arm, again for more (all)"
    )
    rate, speed, duration = _between(0, 10_000), _between(0, 1), _between(0, math.inf)
    simulate.add_argument("--rate", type=rate, default=20.0, help="values a second (20)")
    simulate.add_argument("--seed", type=int, default=1, help="the same one moves the same (1)")
    simulate.add_argument("--speed", type=speed, default=0.5, help="share of top speed (0.5)")
    simulate.add_argument(
        "--duration", type=duration, default=math.inf, help="seconds (until interrupted)"
    )


def _add_serve(commands: Any) -> argparse.ArgumentParser:
    serve: argparse.ArgumentParser = commands.add_parser(
        "serve", help="serve over HTTP", allow_abbrev=False
    )
    serve.set_defaults(command="serve")
    # Settings read and check the texts, so that options and variables are read alike.
    serve.add_argument("--host", help="address to listen on (127.0.0.1)")
    serve.add_argument("--port", help="port to listen on (8017); 0 takes a free one")
    serve.add_argument(
        "--demo",
        action="store_const",
        const="yes",
        help="store made-up arms to try things with, and let them move",
    )
    serve.add_argument("--body-limit", help="bytes a request may have (67108864)")
    serve.add_argument("--body-timeout-s", help="seconds a request may stall (20)")
    serve.add_argument("--connections", help="connections served at once (512)")
    serve.add_argument("--log-level", help="critical, error, warning, info or debug (warning)")
    serve.add_argument("--cluster", help="scheduler for surveys, tcp://... (own processes)")
    serve.add_argument("--survey-workers", help="processes for surveys (one per processor)")
    serve.add_argument("--surveys-days", help="keep surveys that are over for so long (for ever)")
    serve.add_argument("--events-kept", help="events of arms that are kept (100000)")
    serve.add_argument("--events-days", help="days for which they are kept (365)")
    serve.add_argument(
        "--frame-ancestors", help="origins whose pages may show ours in a frame (none)"
    )
    return serve


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="armspan",
        description="Where the tool of a serial arm is. Every option of what works on the "
        "database is also a variable, such as ARMSPAN_PORT; the option wins.",
        allow_abbrev=False,
    )
    commands = parser.add_subparsers(required=True, metavar="COMMAND")
    on_database = [_add_serve(commands)]
    _add_simulate(commands)
    for kind in ("arm", "cell"):
        stored = commands.add_parser(f"{kind}s", help=f"stored {kind}s", allow_abbrev=False)
        actions = stored.add_subparsers(required=True, metavar="ACTION")
        add = actions.add_parser("add", help=f"store {kind}s from JSON files", allow_abbrev=False)
        add.add_argument("files", nargs="+", metavar="FILE")
        add.set_defaults(command="add", kind=kind)
        shown = actions.add_parser("list", help=f"list stored {kind}s", allow_abbrev=False)
        shown.set_defaults(command="list", kind=kind)
        on_database += [add, shown]
    for command in on_database:
        command.add_argument(
            "--database", help="SQLite file or database URL (the user's data folder)"
        )
    return parser


if __name__ == "__main__":
    sys.exit(main())
