"""From annotated sinks, patches and enclosures to surfaces that air cools, and what had to be assumed of them.

Where a dimension has a span, the end that cools least counts; where the annotations have no key for something, what
is assumed errs to the hot side or is common practice, and the workings name it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..board import EnclosureNote, PatchNote, Quantity, SinkNote, Surroundings
from ..physics import copper as copper_physics
from ..physics import enclosure, fins, rings, spreading
from ..physics.convection import blended_h_w_per_m2_k, forced_h_w_per_m2_k, natural_h_w_per_m2_k, radiation_h_w_per_m2_k
from .surfaces import Surface

MATERIALS = {
    "aluminium": (200.0, 2.4e6), "aluminum": (200.0, 2.4e6), "copper": (390.0, 3.4e6), "brass": (110.0, 3.2e6),
    "steel": (45.0, 3.6e6), "stainless steel": (15.0, 3.9e6), "zinc": (110.0, 2.7e6),
}
"""Conductivity [W/(m·K)] and heat capacity [J/(m³·K)] of what sinks are made of: common practice, alloys as extruded or cast."""

SINK_NEEDS = ("fins", "height", "length", "thickness", "spacing", "base", "faces")
FACES = {"vertical": "vertical", "up": "up", "down": "down", "horizontal": "down"}
"""How the physics calls each; of the two that lie flat `horizontal` is taken for the worse."""

BYPASS = 0.5
"""Share of moving air that goes round an open sink instead of through its gaps: common practice is 0.3 to 0.6."""

BARE_M = 10e-3
BOARD_HEIGHT_M = 0.1
MASK_EMISSIVITY = 0.45
"""Solder mask has 0.9; half of what a face of a board sees is taken to be as warm as itself."""

FOIL_M, PLATING_M, LAMINATE_M = 35e-6, 20e-6, 1.6e-3
"""Copper of 1 oz; the least mean plating of IPC-6012 class 2 (from memory); the common board."""

VENT_HEIGHT_M = 0.05
"""From the openings below to those above."""

MOST_INSIDE_K = 60.0
"""Warmer than this over the air outside no enclosure is trusted to be."""


@dataclass(frozen=True, slots=True)
class AirAround:
    """The air that surfaces stand in: its speed [m/s] and the altitude [m], each at the end that cools least."""

    speed_m_per_s: float = 0.0
    altitude_m: float = 0.0

    @property
    def said(self) -> str:
        moving = f"air at {self.speed_m_per_s:g} m/s" if self.speed_m_per_s else "still air"
        return f"{moving}, {self.altitude_m:g} m above the sea"


def air_around(surroundings: Surroundings) -> AirAround:
    """The air of a mode; still and at the sea where nobody says otherwise."""
    speed = surroundings.air.span.min if isinstance(surroundings.air, Quantity) else 0.0
    return AirAround(speed, surroundings.altitude.span.max if surroundings.altitude is not None else 0.0)


def least(quantity: Quantity | None, default: float = 0.0) -> float:
    return quantity.span.min if quantity is not None else default


def plate_fins(note: SinkNote) -> list[fins.PlateFins]:
    """The sink at either end of its gap, which has an optimum; else at the ends that cool least."""
    k_w_per_m_k = MATERIALS[str(note.material or "aluminium").casefold()][0]
    sizes = (int(note.fins.typ), least(note.height), least(note.length), least(note.thickness))
    return [fins.PlateFins(*sizes, gap_m, k_w_per_m_k, least(note.emissivity))
            for gap_m in dict.fromkeys((note.spacing.span.min, note.spacing.span.max))]


def fins_width_m(note: SinkNote) -> float:
    """Width that fins and gaps take."""
    n = note.fins.typ
    return n * note.thickness.span.typ + (n - 1.0) * note.spacing.span.typ


def sink_surface(note: SinkNote, around: AirAround) -> Surface:
    """The surface of a plate-fin sink."""
    made, faces = plate_fins(note), FACES[str(note.faces)]
    speeds = [float(fins.speed_in_gaps_m_per_s(sink, around.speed_m_per_s, BYPASS)) for sink in made]

    def conductance(rise_k, air_c):
        found = [fins.sink_heat_w(sink, air_c + rise_k, air_c, faces, speed, around.altitude_m) / rise_k
                 for sink, speed in zip(made, speeds, strict=True)]
        return np.minimum.reduce(found)

    moving = "Teertstra, Yovanovich and Culham 1999, " if around.speed_m_per_s else ""
    assumed = [f"half of the moving air goes round the sink: {speeds[0]:.3g} m/s in its gaps, along its fins"] if speeds[0] else []
    assumed += ["no radiation, since no emissivity is given"] if note.emissivity is None else []
    assumed += ["aluminium"] if note.material is None else []
    return Surface(conductance, f"{note.fins.text} fins, faces {note.faces}, {around.said}",
                   f"{moving}Elenbaas; Bar-Cohen and Rohsenow 1984; fin efficiency; radiation of its gaps", tuple(assumed))


def base_spreading_k_per_w(note: SinkNote, source_m2: float) -> float:
    """Spreading in the base under one device in its middle, at most: for a surface that gives off little."""
    k_w_per_m_k = MATERIALS[str(note.material or "aluminium").casefold()][0]
    base_m2 = least(note.length) * (least(note.width) or fins_width_m(note))
    return float(spreading.spreading_rth_k_per_w(min(source_m2, base_m2), base_m2, least(note.base), k_w_per_m_k, 1e9))


def sink_capacity_j_per_k(note: SinkNote) -> float:
    """Heat capacity of base and fins, at least."""
    per_m3 = MATERIALS[str(note.material or "aluminium").casefold()][1]
    base_m3 = least(note.base) * (least(note.width) or fins_width_m(note))
    return per_m3 * least(note.length) * (base_m3 + int(note.fins.typ) * least(note.height) * least(note.thickness))


def board_face_w_per_m2_k(rise_k, air_c, around: AirAround):
    """Coefficient of one face of a board at a rise: natural and moving air on 0.1 m, and radiation."""
    surface_c = air_c + rise_k
    still = natural_h_w_per_m2_k(BOARD_HEIGHT_M, surface_c, air_c, "vertical", around.altitude_m)
    moving = forced_h_w_per_m2_k(BOARD_HEIGHT_M, around.speed_m_per_s, surface_c, air_c, around.altitude_m)
    return blended_h_w_per_m2_k(still, moving) + radiation_h_w_per_m2_k(MASK_EMISSIVITY, surface_c, air_c)


def ring_patch(note: PatchNote, pad_m2: float) -> rings.RingPatch:
    """The patch as a disc of its area around the pad, with bare board beyond."""
    copper_m2, foil_m = max(least(note.area), pad_m2), least(note.thickness, FOIL_M)
    layers = int(note.layers.typ) if note.layers is not None else 1
    radius_m = (copper_m2 / np.pi) ** 0.5
    return rings.RingPatch((pad_m2 / np.pi) ** 0.5, radius_m, radius_m + BARE_M, foil_m, (layers - 1) * foil_m, vias_w_per_k(note))


def patch_capacity_j_per_k(note: PatchNote) -> float:
    """Heat capacity of the copper alone, at least: the laminate under it takes up heat more slowly."""
    layers = note.layers.span.min if note.layers is not None else 1.0
    return MATERIALS["copper"][1] * least(note.area) * least(note.thickness, FOIL_M) * layers


def vias_w_per_k(note: PatchNote) -> float:
    """Conductance of the vias through the board."""
    if note.vias is None:
        return 0.0
    drill_m, plating_m = least(note.vias.drill), least(note.vias.plating, PLATING_M)
    return float(1.0 / copper_physics.via_rth_k_per_w(drill_m, plating_m, LAMINATE_M, note.vias.count.span.min))


def patch_surface(note: PatchNote, pad_m2: float, pad_said: str, around: AirAround) -> Surface:
    """The surface of a copper patch with the board around it, from its pad to the air."""
    patch = ring_patch(note, pad_m2)

    def conductance(rise_k, air_c):
        h = board_face_w_per_m2_k(rise_k / 2.0, air_c, around)
        return 1.0 / rings.ring_patch_rth_k_per_w(patch, h, h)

    assumed = [f"pad of {pad_m2 * 1e6:.3g} mm² ({pad_said})", f"bare FR-4 of 1.6 mm to {BARE_M * 1e3:.0f} mm beyond the copper",
               "coefficients of a face of 100 mm at half of the pad's rise",
               f"emissivity {MASK_EMISSIVITY}, for half of what it sees is as warm"]
    assumed += [f"copper of {FOIL_M * 1e6:.0f} µm"] if note.thickness is None else []
    assumed += [f"plating of {PLATING_M * 1e6:.0f} µm"] if note.vias is not None and note.vias.plating is None else []
    return Surface(conductance, f"{note.area.text} of copper, {int(note.layers.typ) if note.layers else 1} layers, {around.said}",
                   "radial fin of two layers, ring by ring; Churchill and Chu 1975; radiation", tuple(assumed))


def enclosure_surface(note: EnclosureNote, around: AirAround) -> Surface:
    """The walls and vents of an enclosure, by what is given of them."""
    faces_m2, vents_m2 = least(note.faces), least(note.vents)

    def conductance(rise_k, air_c):
        total = np.zeros_like(rise_k)
        if faces_m2:
            total = total + enclosure.wall_conductance_w_per_k(faces_m2, rise_k, air_c, BOARD_HEIGHT_M, around.altitude_m)
        if vents_m2:
            total = total + enclosure.vent_conductance_w_per_k(vents_m2 / 2.0, rise_k, air_c, VENT_HEIGHT_M, around.altitude_m)
        return total

    said = [f"faces {note.faces.text}"] if note.faces else []
    said += [f"vents {note.vents.text}, half of them below and half {VENT_HEIGHT_M * 1e3:.0f} mm above"] if note.vents else []
    return Surface(conductance, ", ".join(said), "natural flow and radiation inside and out; draught by Bernoulli",
                   ("loads that heat no part of the board are outside",), MOST_INSIDE_K)
