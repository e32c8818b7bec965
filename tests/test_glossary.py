"""The glossary of DEVELOPERS.md is the one that the docstring test reads."""

from __future__ import annotations

import re
from pathlib import Path

from drc_power.physics.units import UNIT_OF_SUFFIX


def test_the_glossary_stands_in_the_contributors_guide():
    text = (Path(__file__).parents[1] / "DEVELOPERS.md").read_text(encoding="utf-8")
    section = text.split("## Glossary of unit suffixes")[1].split("\n## ")[0]
    assert dict(re.findall(r"`(_\w+)` (\S+)", section)) | {"_c": "°C", "_k": "K"} == UNIT_OF_SUFFIX
