"""Name the ways in which a run could not be done.

A fault of the boat's data is a finding; these are for the command line, which turns them
into exit status 2. Anything else that is raised is a bug of ours and may trace back.
"""

from __future__ import annotations


class CheckerError(Exception):
    """The run could not be done."""


class FleetNotFoundError(CheckerError):
    """There is nothing to check in the folder."""


class LimitSetError(CheckerError):
    """A shipped table is malformed or cites nothing."""


class UsageError(CheckerError):
    """The command was asked for something that does not exist."""
