"""Where the command starts: an interrupt is heard before anything else is loaded."""

from __future__ import annotations

import sys

from search.cli.interrupts import listen, listen_no_more

INTERRUPTED = 130


def run() -> None:
    """Entry point of the command line."""
    try:
        listen()
        from search.cli.main import invoke

        for stream in (sys.stdout, sys.stderr):
            stream.reconfigure(errors="backslashreplace")  # type: ignore[union-attr]
        status = invoke(sys.argv[1:])
        listen_no_more()
    except KeyboardInterrupt:
        listen_no_more()
        status = INTERRUPTED
    sys.exit(status)


if __name__ == "__main__":
    run()
