"""What a user did wrong, said so that the user can put it right."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, order=True)
class Mark:
    """Where a value was written. `line` and `column` count from 1; 0 means the file as a whole."""

    file: str
    line: int = 0
    column: int = 0

    def __str__(self) -> str:
        if not self.line:
            return self.file
        return f"{self.file}:{self.line}:{self.column}" if self.column else f"{self.file}:{self.line}"


@dataclass(frozen=True, slots=True, order=True)
class Fault:
    """One thing that is wrong with an input: where it is, what was found, what to write instead."""

    mark: Mark
    found: str
    instead: str = ""

    def __str__(self) -> str:
        return f"{self.mark}: {self.found}" + (f"; {self.instead}" if self.instead else "")


class InputError(Exception):
    """The check cannot be made: one or more faults of the input. Ends the run with exit status 2."""

    def __init__(self, *faults: Fault) -> None:
        super().__init__("\n".join(str(fault) for fault in faults))
        self.faults = faults
