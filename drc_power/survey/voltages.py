"""Voltages that names suggest. Always a guess: nothing here may enter a calculation before it is annotated."""

from __future__ import annotations

import re
from functools import lru_cache

from drc_power.survey.patterns import one_of

_CONTROL = re.compile(
    r"(^|[_./~{-])(N?EN|ENABLE|PG|PGOOD|PWRGD|GOOD|OK|SENSE|SNS|FB|FLT|FAULT|MON|DET|ADC|ON|OFF|SEL|CTRL|TRIG|IMON|ISENSE|RST|RESET|ALERT|DIS|SHDN|PWM|LED|MEAS)"
    r"(\d*[NB]?)($|[_./})+-])|^~|#$|SENSE|_N$|V\d?PG(OOD)?$"
)
_BETWEEN = re.compile(r"(?<![\d.])([+-]?)(?:[NP]{1,2}(?=\d))?(\d{1,3})[VP](\d{1,2})(?!\d)")
_PLAIN = re.compile(r"(?:^|[^\dA-Z.]|V)([+-]?)[NP]{0,2}(\d{1,3}(?:[.,]\d{1,2})?)V(?!\d)")
_AFTER_V = re.compile(r"^(?:V|VCC|VDD|VOUT|VIN|VBUS|PP|P)[_+]?(\d{1,2})$")
_SHORT = {"33": 3.3, "18": 1.8, "25": 2.5, "50": 5.0, "15": 1.5, "28": 2.8, "5": 5.0, "3": 3.0, "12": None, "10": None, "24": 24.0}
_SUPPLY = re.compile(
    "^[+-]?"
    + one_of(r"""VCC VDD VBUS VBAT+ BAT+ BATT VIN VOUT VSYS V?MOT(?:OR)? VM VPP VAA VEE VSS VPWR PWR POWER VDRV VGG HV HT VREG VRAW RAW VSUP VMAIN
        MAIN DCIN DC PACK PVDD PVCC AVDD AVCC DVDD VLED V_?USB VHV VPOWER VINPUT VSUPPLY SUPPLY VTT VCORE VIO [BPV](?=[+-]) VDDA VCCA VDDIO VCCIO
        VCCINT VCCAUX UIN UB UBAT KL30 KL15 ACC VDC VPOS VNEG""")
    + r"\d?(?:$|[_+./-]|(?=IN|OUT|\d))"
)


def leaf(net: str) -> str:
    """The net's own name in capitals, without its sheets and overbars.

    >>> leaf("/xilinx/+3,3V_OUT")
    '+3,3V_OUT'
    """
    text = net.replace("{slash}", "/").rpartition("/")[2] if not net.startswith(("Net-(", "unconnected-")) else ""
    return text.upper().replace("~", "").replace("{", "").replace("}", "").strip()


@lru_cache(maxsize=8192)
def is_control_name(net: str) -> bool:
    """Whether the name speaks of a signal about a rail (enable, power good, sense) rather than of a rail."""
    return bool(_CONTROL.search(leaf(net)))


@lru_cache(maxsize=8192)
def is_supply_name(net: str) -> bool:
    """Whether the name is one that people give to supplies, with or without a voltage."""
    name = leaf(net)
    return bool(name) and not is_control_name(net) and (bool(_SUPPLY.match(name)) or voltage_of_name(net) is not None)


@lru_cache(maxsize=8192)
def voltage_of_name(net: str) -> float | None:
    """Voltage [V] that a net name says, None when it says none.

    >>> [voltage_of_name(n) for n in ("+3V3", "VCC_1V8", "PP1V8", "VDD_3V3_A", "-12V", "P0V85", "+3.3V", "VBUS", "V+")]
    [3.3, 1.8, 1.8, 3.3, -12.0, 0.85, 3.3, 5.0, None]
    """
    name = leaf(net)
    if not name or is_control_name(net):
        return None
    sign = -1.0 if re.search(r"(^|[_])(-|N(?=\d+V)|VNEG|MINUS)", name) else 1.0
    between = _BETWEEN.search(name)
    if between and not re.match(r"^P\d+P\d+$", name):
        return sign * float(f"{between[2]}.{between[3]}")
    plain = _PLAIN.search(name)
    if plain:
        return sign * float(plain[2].replace(",", "."))
    short = _AFTER_V.match(name)
    if short and short[1] in _SHORT:
        return _SHORT[short[1]]
    return 5.0 if re.match(r"^(V_?BUS|USB_?VBUS|VUSB|V_USB|\+?5VUSB)", name) or name.endswith("VBUS") else None


_PART_ROWS: tuple[tuple[str, str, float], ...] = (
    (r"(?<!\d)78[LMTNS]?(0[5689]|1[0258]|24|33|15|20)(?!\d)", "78xx: the last two digits are volts", 1.0),
    (r"(?<!\d)79[LMT]?(0[5689]|1[0258]|24)(?!\d)", "79xx: the last two digits are volts, negative", -1.0),
)
_DASH = re.compile(r"[-_](\d{1,2})[.VP](\d{1,2})(?!\d)")
_JOINED = re.compile(r"(?<=[A-Z-])(\d)V(\d)|(?<=[A-Z])(\d)\.(\d)")
_CODES = {"33": 3.3, "30": 3.0, "28": 2.8, "25": 2.5, "18": 1.8, "15": 1.5, "12": 1.2, "10": 1.0, "50": 5.0, "36": 3.6, "27": 2.7, "085": 0.85, "09": 0.9}
_CODE = re.compile(r"(?:[-_]|(?<=[A-Z])|(?<=1117)|(?<=P))(33|30|28|25|18|50|36|27)(?:0?[0-9]?[A-Z]{0,4})?(?:[-_/ ]|$)|P(33|30|28|25|18|15|12|50)2")


def voltage_of_part(value: str) -> tuple[float, str] | None:
    """(volts, why) of a fixed regulator whose part number ends in its voltage as the trade writes it, or None.

    >>> voltage_of_part("AP2112K-1.8"), voltage_of_part("L7805"), voltage_of_part("TLV1117LV33")[0], voltage_of_part("LM317")
    ((1.8, 'suffix of the part number'), (5.0, '78xx: the last two digits are volts'), 3.3, None)
    """
    text = value.upper()
    for pattern, why, sign in _PART_ROWS:
        match = re.search(pattern, text)
        if match:
            volts = 3.3 if match[1] == "33" else float(match[1])
            return sign * volts, why
    match = _DASH.search(text) or _JOINED.search(text)
    if match:
        whole, part = [digits for digits in match.groups() if digits][:2]
        return float(f"{whole}.{part}"), "suffix of the part number"
    code = _CODE.search(text)
    if code:
        return _CODES[code[1] or code[2]], "suffix of the part number"
    return None


REFERENCES_V: tuple[tuple[str, float], ...] = (
    (r"LM3(17|37|38|50)|1117.*ADJ|LT108[3-6]|LM1084", 1.25),
    (r"MC3[34]063|NCP3063", 1.25),
    (r"LM25(75|76|77|96)|LM259\d", 1.23),
    (r"LT137\d", 1.245),
    (r"TPS5420\d|TPS5620\d", 0.596),
    (r"TPS54(30|31|33|40)\d?|TPS5430", 1.221),
    (r"MT3608|TPS62\d|AP3\d{3}|SY8\d{3}|TPS82\d", 0.6),
    (r"MP1584|MP23\d\d|MP2307", 0.8),
)
"""Feedback references [V] of common adjustable regulators, from memory of their data sheets: a guess, said so."""


def reference_of_part(value: str) -> float | None:
    """Feedback reference [V] of an adjustable regulator that the table knows, or None."""
    return next((volts for pattern, volts in REFERENCES_V if re.search(pattern, value.upper())), None)
