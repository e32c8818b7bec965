"""The rails of a survey: supply nets with a guessed voltage, the reason, and what feeds them."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from drc_power.survey.model import Element, Rail
from drc_power.survey.pins import is_ground_pin, plain
from drc_power.survey.standing import Standing
from drc_power.survey.values import ohms
from drc_power.survey.voltages import leaf, reference_of_part, voltage_of_name, voltage_of_part


def make_rails(nets: Standing, elements: Sequence[Element]) -> tuple[Rail, ...]:
    """One Rail per supply net, in the netlist's order."""
    return tuple(_rail(nets, net, elements) for net in nets.wiring.nets if net in nets.supplies)


def _rail(nets: Standing, net: str, elements: Sequence[Element]) -> Rail:
    feeders = _fed_by(nets, net, elements)
    volts, because = _voltage(nets, net, feeders)
    return Rail(net, volts, because, feeders)


def _fed_by(nets: Standing, net: str, elements: Sequence[Element]) -> tuple[str, ...]:
    """What supply current comes through to the rail; behind a converter's inductor stands the converter."""
    direct = [e for e in elements if e.to_net == net and e.group in ("source", "pass", "switch") and not _gives_back(e, elements)]
    fed: dict[str, None] = {tap.ref: None for tap in nets.wiring.taps(net) if tap.kind == "ic" and tap.pin.type == "power_out" and not is_ground_pin(tap.pin)}
    for e in direct:
        chips = [c.ref for c in elements if c.role == "switching-regulator" and c.to_net == e.from_net] if e.role == "inductor" else []
        for ref in chips or [e.ref]:
            fed[ref] = None
    return tuple(fed)


def _gives_back(e: Element, elements: Sequence[Element]) -> bool:
    """A freewheel diode returns what the rail itself has fed: nothing but diodes leads to where it starts."""
    if e.role != "diode" or e.group != "switch":
        return False
    return not any(o.to_net == e.from_net and o.from_net != e.to_net for o in elements if o.group in ("pass", "switch") and o.role != "diode")


def _voltage(nets: Standing, net: str, feeders: Iterable[str]) -> tuple[float | None, str]:
    volts = voltage_of_name(net)
    if volts is not None and (not _is_bus_name(net) or _on_usb(nets, net)):
        return volts, "net name"
    for ref in feeders:
        if nets.wiring.kind(ref) in ("linear-regulator", "switching-regulator"):
            part = nets.wiring.netlist.parts[ref]
            guess = voltage_of_part(part.value) or voltage_of_part(part.symbol)
            if guess:
                return guess[0], f"{ref}: {guess[1]}"
            divided = _by_divider(nets, net, ref)
            if divided:
                return divided, f"{ref}: feedback divider and the usual reference"
    words = [word for word in nets.supply_words[net] if "voltage" not in word]
    return None, (words or ["net name is a supply's"])[0]


def _is_bus_name(net: str) -> bool:
    name = leaf(net)
    return "BUS" in name and "USB" not in name and not any(c.isdigit() for c in name)


def _on_usb(nets: Standing, net: str) -> bool:
    """Whether a USB connector, or a chip with USB data pins, sits on the net."""
    return any(
        {plain(p.name) for p in tap.part.pins} & {"D+", "D-", "DP", "DM", "CC1", "CC", "DP1", "DN1", "-D", "+D", "USB_D+", "USB_DP", "UD+"}
        or "USB" in f"{tap.part.symbol} {tap.part.footprint} {tap.part.value}".upper()
        for tap in nets.wiring.taps(net)
    )


def _by_divider(nets: Standing, net: str, ref: str) -> float | None:
    """Vref · (1 + R_top/R_bottom), with the reference that the regulator's family usually has."""
    part = nets.wiring.netlist.parts[ref]
    reference = reference_of_part(part.value) or reference_of_part(part.symbol)
    feedback = nets.wiring.net(ref, "feedback")
    if reference is None or not feedback or feedback == net:
        return None
    top = [ohms(t.part.value) for t in nets.wiring.tied(feedback, "resistor") if nets.wiring.across(t) == net]
    bottom = [ohms(t.part.value) for t in nets.wiring.tied(feedback, "resistor") if nets.wiring.across(t) in nets.grounds]
    if len(top) != 1 or len(bottom) != 1 or not top[0] or not bottom[0]:
        return None
    upside = bottom[0] / top[0] if reference == 1.25 and _is_floating(part.value) else top[0] / bottom[0]
    return float(f"{reference * (1 + upside):.3g}")


def _is_floating(value: str) -> bool:
    """A three-terminal regulator holds its reference between output and adjust pin, over the upper resistor."""
    return any(code in value.upper() for code in ("317", "337", "338", "350", "1117", "108"))
