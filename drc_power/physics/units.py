"""The glossary of unit suffixes: the end of a number's name, and the unit that it stands for.

SI throughout, without prefixes; temperatures in degrees Celsius (`_c`), differences of temperature in
kelvin (`_k`), charge in coulomb spelt out, since `_c` is taken. A number without a suffix has no
dimension, and its docstring says so with `[-]`.
"""

UNIT_OF_SUFFIX = {
    "_v": "V",
    "_a": "A",
    "_w": "W",
    "_ohm": "ohm",
    "_s": "s",
    "_rad_per_s": "rad/s",
    "_hz": "Hz",
    "_rad": "rad",
    "_j": "J",
    "_f": "F",
    "_h": "H",
    "_coulomb": "C",
    "_a2_s": "A2.s",
    "_a2_per_s": "A2/s",
    "_v_per_s": "V/s",
    "_v_per_k": "V/K",
    "_a_per_k": "A/K",
    "_a_per_s": "A/s",
    "_per_s": "1/s",
    "_per_k": "1/K",
    "_per_m": "1/m",
    "_ohm_m": "ohm.m",
    "_c": "°C",
    "_k": "K",
    "_k_per_w": "K/W",
    "_k_s_per_w": "K.s/W",
    "_m2_k_per_w": "m2.K/W",
    "_k_per_s": "K/s",
    "_w_per_k": "W/K",
    "_j_per_k": "J/K",
    "_w_per_m_k": "W/(m.K)",
    "_w_per_m2_k": "W/(m2.K)",
    "_w_per_m2": "W/m2",
    "_m": "m",
    "_m2": "m2",
    "_m3": "m3",
    "_m_per_s": "m/s",
    "_m2_per_s": "m2/s",
    "_m3_per_s": "m3/s",
    "_kg_per_m3": "kg/m3",
    "_j_per_kg_k": "J/(kg.K)",
    "_pa": "Pa",
    "_pa_s": "Pa.s",
}


def unit_of(name):
    """The unit that the longest known suffix of `name` stands for, or "" when it has none.

    name: the name of a number or of a function that returns one [text].
    Returns the unit [text].
    Source: the SI, BIPM SI Brochure, 9th edition, for the units.

    >>> unit_of("rth_jc_k_per_w"), unit_of("duty")
    ('K/W', '')
    """
    suffixes = [suffix for suffix in UNIT_OF_SUFFIX if name.endswith(suffix)]
    return UNIT_OF_SUFFIX[max(suffixes, key=len)] if suffixes else ""
