"""How much of a package's underside gives its heat to copper or a sink, from the name of its footprint.

Areas are the least that the outline allows, so that spreading is never taken too small. A footprint that names its
exposed pad (`EP2.5x3.1mm`) is taken at its word.
"""

from __future__ import annotations

import re

EXPOSED = re.compile(r"EP(\d+(?:\.\d+)?)x(\d+(?:\.\d+)?)mm")

OUTLINES: tuple[tuple[str, float, str], ...] = (
    (r"TO-?264", 250e-6, "JEDEC TO-264, metal back (from memory)"),
    (r"TO-?247|TO-?3P", 160e-6, "JEDEC TO-247, metal back (from memory)"),
    (r"TO-?220|TO-?262|TO-?218", 80e-6, "JEDEC TO-220, metal back (from memory)"),
    (r"TO-?263|D2PAK", 50e-6, "JEDEC TO-263, tab (from memory)"),
    (r"TO-?252|DPAK", 26e-6, "JEDEC TO-252, tab (from memory)"),
    (r"TOLL|HSOF-8", 45e-6, "HSOF-8, metal back (common practice)"),
    (r"SOT-?223", 5e-6, "JEDEC SOT-223, wide lead (from memory)"),
    (r"SOT-?89", 3e-6, "JEDEC SOT-89, wide lead (from memory)"),
    (r"LFPAK|SO-?8FL|PowerPAK_SO-8|TDSON-8|PQFN.*5x6|VSON.*5x6|WDFN.*5x6", 12e-6, "metal back of 5 x 6 mm packages (common practice)"),
    (r"PowerPAK_1212|PQFN.*3x3|TSDSON|WDFN.*3x3|VSON.*3.3x3.3", 3.5e-6, "metal back of 3 x 3 mm packages (common practice)"),
    (r"_2512|_6332", 6e-6, "one terminal of a 2512 chip (common practice)"),
)
"""Pattern of a footprint's name, least area [m²], and where it is from."""

LEADS_M2 = 1e-6
ON_SINK_M2 = 25e-6


def pad_area_m2(footprint: str, unknown_m2: float = LEADS_M2) -> tuple[float, str]:
    """The least area through which a package gives off its heat [m²], and why."""
    name = footprint.rpartition(":")[2]
    exposed = EXPOSED.search(name)
    if exposed:
        return float(exposed[1]) * float(exposed[2]) * 1e-6, f"exposed pad of {name}"
    for pattern, area_m2, source in OUTLINES:
        if re.search(pattern, name, re.IGNORECASE):
            return area_m2, source
    return unknown_m2, "an unknown package is taken to be this small"
