"""The workings of findings on events: which path, which window, which line, and how the temperatures came about."""

from __future__ import annotations

import numpy as np

from ..findings.model import Step
from ..physics.area_use import equivalent_length_s
from ..physics.avalanche import stored_energy_j
from ..physics.envelope import case_factor
from .event_view import EventView, deciding_point, deciding_share

Steps = tuple[Step, ...]


def path_steps(element: EventView, k: int) -> Steps:
    """The path at one sample: its hardest ends, its length, its energy."""
    response = element.response
    v, i = (x[response.row[k]] for x in (response.path.peak_v, response.path.peak_a))
    said = f"event {element.name}, {element.event.kind}"
    return (Step("V", f"highest voltage across {element.ref}", "", _number(v), "V", said),
            Step("I", f"highest current through {element.ref}", "", _number(i), "A", said),
            Step("t", "length", "", _number(response.lasts_s[k]), "s", said),
            Step("E", "∫ v · i dt", "", _number(response.energy_j[k]), "J", said))


def junction_steps(element: EventView, k: int) -> Steps:
    """How the junction got hottest: where it started, what the case did, what the event added."""
    response, impedance = element.response, element.impedance
    at = response.peak_at[k]
    start, case = response.start.tj_c[k], response.case_rise_k[k, at]
    event_k, before_w = response.rise_k[response.row[k], at], response.start.power_w[k]
    unit = response.unit_k[response.row[k], at]
    source = impedance.entry if impedance is not None else "thermal.rth_jc, as the event is slow"
    if impedance is not None and impedance.is_fitted and response.period_s is not None:
        source += f"; its Foster network of {len(impedance.foster.tau_s)} terms is within {100 * impedance.foster.residual:.2g} % of its points"
    returns = ", returning for ever" if response.period_s is not None else ""
    return (*path_steps(element, k),
            Step("T_start", "steady junction", "", _number(start), "°C", f"mode {element.view.mode.name}"),
            Step("t_hot", "hottest moment", "", _number(response.path.t_s[response.row[k], at]), "s", "search along the path"),
            Step("ΔT_case", "rise of the case", "", _number(case), "K", _case_source(element)),
            Step("ΔT", f"∫ P dZ_th{returns}", "", _number(event_k), "K", source),
            Step("ΔT_before", "P_steady · Z_th(t_hot)", f"{before_w:.6g} · {unit:.6g}", _number(before_w * unit), "K",
                 "the event's power takes the place of the steady one"),
            Step("Tj", "T_start + ΔT_case + ΔT − ΔT_before", f"{start:.6g} + {case:.6g} + {event_k:.6g} − {before_w * unit:.6g}",
                 _number(response.peak_c[k]), "°C", "superposition"))


def _case_source(element: EventView) -> str:
    if element.longest_s > 1.0:
        return "heat capacities beyond the case"
    return "mean power through the way beyond the case" if element.event.every is not None else "held: the event is shorter than 1 s"


def envelope_steps(element: EventView, k: int) -> Steps:
    """Which window of the path decided, and which line: the rectangle that uses as much of the area."""
    response, area = element.response, element.area
    shares = deciding_share(element)[k]
    if np.isnan(shares).all():
        return path_steps(element, k)
    at = int(np.nanargmax(shares))
    row = response.row[k]
    case = response.case_c[k, at + 1]
    factor = float(case_factor(min(case, area.tj_max_c), area.tj_max_c))
    v, i = (float(x[row]) for x in deciding_point(element)[:2])
    lines_a = np.array([float(line[0]) for line in area.lines_a(np.array([v]))])
    n, end_s = len(area.lengths_s), response.path.t_s[row, at + 1]
    with np.errstate(divide="ignore", invalid="ignore"):
        use = np.where(lines_a > 0.0, i / lines_a, np.inf)
        length_s = float(equivalent_length_s([shares[at] * factor], [use[:n]], area.lengths_s)[0]) if n else end_s
        rated = i / shares[at]
    return (*path_steps(element, k),
            Step("T_case", "case at the end of the window", "", _number(case), "°C", _case_source(element)),
            Step("k", f"share of the {'drawn' if not area.is_derived else 'derived'} area at that case, scaled by {area.scaling}",
                 f"({area.tj_max_c:.6g} − {case:.6g})/({area.tj_max_c:.6g} − 25)", _number(factor), "", "(Tj,max − T_case)/(Tj,max − 25 °C)"),
            Step("window", f"0 to the moment that decides, {_line(element, length_s)}", "", _number(end_s), "s",
                 "every window, each slice by the line of its age"),
            Step("V_d, I_d", "hardest point of the path", f"{v:.6g} V, {i:.6g} A", _number(i), "A", "path"),
            Step("t_eq", "rectangle at that point that uses as much of the area", "", _number(length_s), "s", "I = a · t^m between lines"),
            Step("I_safe", "I_d / share used", f"{i:.6g}/{shares[at]:.6g}", _number(rated), "A", "safe area"))


def _line(element: EventView, length_s: float) -> str:
    """Which line of the area decides, in words."""
    area = element.area
    if area.is_derived:
        return "by the line of the transient impedance"
    lengths = area.lengths_s
    if not len(lengths) or length_s > lengths[-1] or element.longest_s > lengths[-1] and length_s >= lengths[-1] * (1 - 1e-9):
        return "by the dc line"
    above = lengths[min(int(np.searchsorted(lengths, length_s * (1 - 1e-9))), len(lengths) - 1)]
    return f"by the lines up to {above:g} s"


def avalanche_steps(element: EventView, k: int) -> Steps:
    """The energy, and the plain ½·L·I² beside it."""
    response, inputs = element.response, element.event.inputs
    value = element.view.solution.value
    henry, ampere, volt, supply = (float(value(inputs[key])[k]) for key in ("inductance", "current", "clamp", "supply"))
    share = element.event.share
    plain = stored_energy_j(henry, ampere) * share
    return (Step("½·L·I²", "stored energy" + (" of this part's share" if share < 1.0 else ""), f"½ · {henry:.6g} · {ampere:.6g}²",
                 _number(plain), "J", "definition of inductance"),
            Step("V", "limits.breakdown", "", _number(volt), "V", "device data"),
            Step("t", "L · I/(V − V_supply)", f"{henry:.6g} · {ampere:.6g}/({volt:.6g} − {supply:.6g})", _number(response.lasts_s[k]), "s",
                 "the current falls straight to 0"),
            Step("E", "½·L·I² · V/(V − V_supply)", f"{plain:.6g} · {volt:.6g}/({volt:.6g} − {supply:.6g})",
                 _number(response.energy_j[k]), "J", "supply included"))


def _number(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
