"""The exceptions of gaitlab: bad input raises, a failed run is a value with a name and a remedy instead."""

from __future__ import annotations


class GaitlabError(Exception):
    """Root of everything gaitlab raises on purpose."""


class InputError(GaitlabError, ValueError):
    """A value given by the user breaks a rule; the message says which and how it is usually put right."""


class RobotFileError(InputError):
    """A robot file breaks a rule; the message names file, table, key, line, rule, value and usual fix."""


class MissingExtraError(GaitlabError, ImportError):
    """An optional dependency is not installed; the message names the extra that brings it."""


class RunFolderError(GaitlabError, OSError):
    """A run folder or its ledger cannot be used as asked; nothing was overwritten."""


def must(name: str, rule: str, got: object, fix: str = "") -> str:
    """The one form of an error text: *name* must be *rule*, got *value*; then the usual fix.

    >>> must("length_mm", "above 0 mm", -3.0, "give the drawn length")
    'length_mm must be above 0 mm, got -3.0; usual fix: give the drawn length'
    """
    text = f"{name} must be {rule}, got {got!r}"
    return f"{text}; usual fix: {fix}" if fix else text
