"""The program as a process. Nothing is imported before an interrupt is taken care of."""

import sys

from tui import interrupt


def main() -> int:
    """Run the command line of this process; returns the exit status, as of `tui.commands.main`."""
    interrupt.take()
    from tui import commands

    return commands.main()


if __name__ == "__main__":
    sys.exit(main())
