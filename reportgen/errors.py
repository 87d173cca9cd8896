"""Every error that a user can meet.

One small tree. Each error knows the exit status it ends a command with, and says
what was found and what would do; the command line prints it without a traceback.
"""

from __future__ import annotations

from dataclasses import dataclass


class ReportgenError(Exception):
    """Root of all errors raised on purpose; ends a command with ``exit_status``."""

    exit_status = 1


@dataclass(frozen=True)
class Problem:
    """One thing wrong with an input: where it stands, what it is, what would do.

    Parameters
    ----------
    message
        What was found, in words.
    remedy
        What would do instead; empty where the message says it all.
    file
        Name of the file, empty if the problem is not in a file.
    line, column
        Position counted from 1; 0 where there is none.
    field
        Path of the field, such as ``rotor.mass`` or ``criteria[2].margin``.
    """

    message: str
    remedy: str = ""
    file: str = ""
    line: int = 0
    column: int = 0
    field: str = ""

    def __str__(self) -> str:
        """Give one line, ``file:line:column: field: message; remedy``."""
        place = ":".join([self.file, *(str(n) for n in (self.line, self.column) if n)])
        parts = [part for part in (place, self.field) if part]
        parts.append(f"{self.message}; {self.remedy}" if self.remedy else self.message)
        return ": ".join(parts)


class InputError(ReportgenError):
    """A case file, side table or command is at fault; carries every problem found."""

    exit_status = 2

    def __init__(self, problems: Problem | list[Problem]) -> None:
        self.problems = [problems] if isinstance(problems, Problem) else list(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class ModelError(ReportgenError, ValueError):
    """A quantity handed to the mechanics or to a criterion is outside what the method covers."""

    exit_status = 2


class RunError(ReportgenError):
    """A template did not run to its end."""


class CellError(RunError):
    """A cell of a template failed, did not end, or never ran.

    Parameters
    ----------
    template
        File name of the template.
    number
        Place of the cell in the template, counted from 1 over cells of every kind.
    line
        First line of the cell.
    name, message
        The exception's name and message, or what stands for them.
    partial
        The notebook as far as it came, as the bytes of an ``.ipynb`` file.
    """

    def __init__(
        self, template: str, number: int, line: str, name: str, message: str, partial: bytes = b""
    ) -> None:
        super().__init__(template, number, line, name, message, partial)
        self.template = template
        self.number = number
        self.line = line
        self.name = name
        self.message = message
        self.partial = partial

    def __str__(self) -> str:
        """Give one line: where it stands, what was met."""
        return f"{self.template}, cell {self.number} ({self.line}): {self.name}: {self.message}"


class PublishError(ReportgenError):
    """A report could not be rendered truthfully."""


class PackageError(ReportgenError):
    """There is no such package, it cannot be read, or it would overwrite what must stay."""

    exit_status = 2


class DiskError(PackageError):
    """The disk or its rights did not let a package be written; nothing is at fault with it."""

    exit_status = 1


class SignatureError(ReportgenError):
    """An identity cannot be used, or the rules of signing do not allow a sign-off."""

    exit_status = 2


class SignatureNotMadeError(SignatureError):
    """A token or a time-stamping authority did not do its part."""

    exit_status = 1


class VerificationError(ReportgenError):
    """A package does not hold what its manifest and signatures say."""

    exit_status = 4
