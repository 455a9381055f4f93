"""The errors of the project: one base class, the exit code on the class, all of them picklable.

::

    HeatwrightError (exit code 3: some input could not be processed)
    ├── Refused               one input cannot be used; carries the Findings that say why (findings.py)
    ├── UsageError            what was asked for does not make sense (exit code 2)
    └── ShippedFileMissing    the installation itself is incomplete
"""

from __future__ import annotations

from typing import ClassVar


class HeatwrightError(Exception):
    """Base of every error the project raises on purpose; its text is a whole sentence for the user."""

    exit_code: ClassVar[int] = 3


class UsageError(HeatwrightError):
    """The request contradicts itself or cannot be understood; nothing was read or written."""

    exit_code: ClassVar[int] = 2


class ShippedFileMissing(HeatwrightError):
    """A template, sample or data file that belongs to the package is not where it should be."""

    exit_code: ClassVar[int] = 70
