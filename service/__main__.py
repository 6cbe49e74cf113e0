"""The command ``armspan``: serve, and stored arms and cells from the command line.

Left out: what the subcommands do.
"""

import argparse
import sys
from collections.abc import Sequence

from service.errors import ServiceError
from service.server import run
from service.settings import Settings, WrongSetting
from service.stored_commands import add_stored, list_stored

_WRONG_USE = 2


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; return its exit code (2: used wrongly, 1: did not work)."""
    given = vars(_parser().parse_args(arguments))
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


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="armspan",
        description="Where the tool of a serial arm is. Every option is also a variable, "
        "such as ARMSPAN_PORT; the option wins.",
        allow_abbrev=False,
    )
    commands = parser.add_subparsers(required=True, metavar="COMMAND")
    serve = commands.add_parser("serve", help="serve over HTTP", allow_abbrev=False)
    serve.set_defaults(command="serve")
    # Settings read and check the texts, so that options and variables are read alike.
    serve.add_argument("--host", help="address to listen on (127.0.0.1)")
    serve.add_argument("--port", help="port to listen on (8017); 0 takes a free one")
    serve.add_argument(
        "--demo", action="store_const", const="yes", help="store made-up arms to try things with"
    )
    serve.add_argument("--body-limit", help="bytes a request may have (67108864)")
    serve.add_argument("--body-timeout-s", help="seconds a request may stall (20)")
    serve.add_argument("--connections", help="connections served at once (512)")
    serve.add_argument("--log-level", help="critical, error, warning, info or debug (warning)")
    serve.add_argument("--cluster", help="scheduler for surveys, tcp://... (own processes)")
    serve.add_argument("--survey-workers", help="processes for surveys (one per processor)")
    on_database = [serve]
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
