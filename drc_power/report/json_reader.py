"""Findings JSON back into a document that `findings.compare` can trust the shape of."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

from drc_power.faults import Fault, InputError, Mark
from drc_power.findings.model import VERDICTS
from drc_power.report.json_writer import FORMAT
from drc_power.text import printable, shorten

_INSTEAD = "give a file that `drc-power check --json` wrote"
_MOST_FAULTS = 5

Test = Callable[[Any], bool]


def _is_text(value: Any) -> bool:
    return isinstance(value, str)


def _is_text_or_null(value: Any) -> bool:
    return value is None or isinstance(value, str)


def _is_number_or_null(value: Any) -> bool:
    return value is None or (isinstance(value, (int, float)) and not isinstance(value, bool))


def _is_verdict(value: Any) -> bool:
    return value in VERDICTS


def _is_verdict_or_null(value: Any) -> bool:
    return value is None or value in VERDICTS


def _is_list_of_text(value: Any) -> bool:
    return isinstance(value, list) and all(isinstance(item, str) for item in value)


_NEEDED: dict[str, dict[str, Test]] = {
    "parts": {"ref": _is_text, "uuid": _is_text_or_null, "sheet": _is_text_or_null, "value": _is_text_or_null,
              "device": _is_text_or_null, "role": _is_text_or_null},
    "rails": {},
    "loads": {},
    "rules": {},
    "findings": {"id": _is_text, "rule": _is_text, "stress": _is_text_or_null, "verdict": _is_verdict,
                 "was": _is_verdict_or_null, "ref": _is_text_or_null, "uuid": _is_text_or_null,
                 "net": _is_text_or_null, "mode": _is_text_or_null, "event": _is_text_or_null,
                 "corner": _is_text_or_null, "quantity": _is_text, "value": _is_number_or_null,
                 "allowed": _is_number_or_null, "unit": _is_text, "margin": _is_number_or_null, "text": _is_text},
}
"""What every row of each list must have, and what each of these must be."""

_COVERAGE: dict[str, Test] = {
    "elements": _is_number_or_null, "judged": _is_number_or_null, "unproven": _is_list_of_text,
    "outside": _is_list_of_text, "not_fitted": _is_list_of_text,
}
_BOARD: dict[str, Test] = {"name": _is_text_or_null, "revision": _is_text_or_null, "netlist": _is_text_or_null}


def read_result(path: str) -> dict[str, Any]:
    """The document in a file. Raises InputError where the file cannot be read or is no findings JSON."""
    try:
        text = Path(path).read_text(encoding="utf-8")
    except UnicodeDecodeError:
        raise InputError(Fault(Mark(path), "is not UTF-8 text", _INSTEAD)) from None
    except (OSError, ValueError) as error:
        reason = (getattr(error, "strerror", None) or str(error)).lower()
        raise InputError(Fault(Mark(printable(path)), f"cannot be read: {reason}", _INSTEAD)) from None
    return load_result(text, path)


def load_result(text: str, path: str = "findings JSON") -> dict[str, Any]:
    """The document that the text holds.

    path: what faults call the text. Raises InputError for anything but findings JSON of this format version, with up
    to five faults. What `compare` reads is then there and of its type; other keys are passed through unseen.
    """
    document = _parsed(text, path)
    if not isinstance(document, dict) or not {"format", "findings"} <= document.keys():
        raise InputError(Fault(Mark(path), "is not a findings file", _INSTEAD))
    if document["format"] != FORMAT or isinstance(document["format"], bool):
        found = f"is of format {_shown(document['format'])}, and this version reads format {FORMAT}"
        raise InputError(Fault(Mark(path), found, "check that revision again with this version of drc-power"))
    faults = [fault for fault, _ in zip(_faults(document, path), range(_MOST_FAULTS))]
    if faults:
        raise InputError(*faults)
    return document


def _parsed(text: str, path: str) -> Any:
    try:
        return json.loads(text, parse_constant=_refuse_constant)
    except json.JSONDecodeError as error:
        mark = Mark(path, error.lineno, error.colno)
        raise InputError(Fault(mark, f"is not JSON: {error.msg}", _INSTEAD)) from None
    except (ValueError, RecursionError) as error:
        found = "is nested too deeply" if isinstance(error, RecursionError) else f"is not JSON: {error}"
        raise InputError(Fault(Mark(path), found, _INSTEAD)) from None


def _refuse_constant(name: str) -> None:
    raise ValueError(f"{name} is not a JSON number")


def _faults(document: dict[str, Any], path: str) -> Iterator[Fault]:
    for key, needed in (("coverage", _COVERAGE), ("board", _BOARD)):
        yield from _row_faults(document.get(key), key, needed, path)
    for key, needed in _NEEDED.items():
        rows = document.get(key)
        if not isinstance(rows, list):
            yield Fault(Mark(path), f"{key} is not a list", _INSTEAD)
            continue
        for index, row in enumerate(rows):
            yield from _row_faults(row, f"{key}[{index}]", needed, path)


def _row_faults(row: Any, name: str, needed: dict[str, Test], path: str) -> Iterator[Fault]:
    if not isinstance(row, dict):
        yield Fault(Mark(path), f"{name} is not an object", _INSTEAD)
        return
    for key, test in needed.items():
        if key not in row:
            yield Fault(Mark(path), f"{name} has no {key}", _INSTEAD)
        elif not test(row[key]):
            yield Fault(Mark(path), f"{name}.{key} cannot be {_shown(row[key])}", _INSTEAD)


def _shown(value: Any) -> str:
    return shorten(printable(json.dumps(value, ensure_ascii=False)), 40)
