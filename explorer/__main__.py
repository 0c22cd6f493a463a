"""Start: ``python3 -m explorer`` opens the workbench, a word after it is a command."""

import sys
from collections.abc import Sequence

from explorer import __version__
from explorer.environment import enter


def main(argv: "Sequence[str] | None" = None) -> int:
    """Run the command line or open the workbench; returns the exit code.

    Nothing but the standard library is imported before the environment is ready.
    """
    arguments = list(sys.argv[1:] if argv is None else argv)
    if arguments == ["--version"]:
        print("twistfront", __version__)
        return 0
    enter("run", "explorer", arguments)
    try:
        if opens_workbench(arguments):
            from explorer import server

            return server.main(arguments)
        from explorer import commands

        return commands.main(arguments)
    except KeyboardInterrupt:
        print("Stopped.", file=sys.stderr)
        return 130


def opens_workbench(arguments: "Sequence[str]") -> bool:
    """No command, only options of the workbench (``--no-browser``, ``--port N``)?"""
    return not arguments or arguments[0].startswith(("--no-browser", "--port"))


if __name__ == "__main__":
    sys.exit(main())
