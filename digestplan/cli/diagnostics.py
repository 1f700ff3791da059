"""Standard error and exit statuses: this module alone writes the one and knows the other."""

import os
import sys
import traceback
from collections.abc import Callable

from digestplan.problems import InputError

DONE, WRONG_INPUT, WRONG_COMMAND, FAILED = 0, 1, 2, 3


def run(command: Callable[[], int | None]) -> int:
    """
    Run a command and turn what it raises into messages and an exit status.

    Parameters
    ----------
    command
        Takes nothing; returns an exit status, or None for done.

    Returns
    -------
    status
        0 done; 1 the input is wrong (a message a problem); 3 the program itself failed.
    """
    try:
        return command() or DONE
    except InputError as error:
        for problem in error.problems:
            complain(str(problem))
        return WRONG_INPUT
    except KeyboardInterrupt:
        complain("stopped")
        return 130
    except Exception as error:  # noqa: BLE001 - the last line of defence
        if os.environ.get("DIGESTPLAN_DEBUG"):
            traceback.print_exc()
        complain(
            f"digestplan failed ({type(error).__name__}: {error}). This is a fault of the "
            "program, not of your plan; DIGESTPLAN_DEBUG=1 shows where."
        )
        return FAILED


def complain(message: str) -> None:
    """Write one message to standard error, on one line."""
    sys.stderr.write(" ".join(message.splitlines()) + "\n")


def refuse(message: str) -> int:
    """Write a message and return the status of a wrong command line."""
    complain(message)
    return WRONG_COMMAND
