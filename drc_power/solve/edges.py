"""What every switching cycle costs the switches of a position: overlap of voltage and current, and charges moved."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from ..physics.switching import overlap_loss_w, recovery_loss_w
from .groups import Loss, Numbers
from .position import Carrying
from .variables import ZERO, Param

OVERLAP = "Infineon, MOSFET Power Losses Calculation Using the Data-Sheet Parameters, 2006, eq. 7 and next"
CHARGE = "common practice: the charge of a half bridge crosses the supply once a cycle"
RECOVERY = "as the overlap; all of it counted in the switch"


@dataclass(frozen=True, slots=True)
class Edge:
    """One switch's edges: rise and fall time [s], output charge [C]."""

    rise_s: Param = ZERO
    fall_s: Param = ZERO
    output_coulomb: Param = ZERO


@dataclass(frozen=True, slots=True)
class Edges:
    """The edges of each main switch, and the charges of the free side: its output charge and what it recovers [C]."""

    switches: tuple[Edge, ...] = ()
    free_output_coulomb: tuple[Param, ...] = ()
    recovery_coulomb: tuple[Param, ...] = ()

    def params(self, side: str = "") -> dict[str, Param]:
        """The numbers, by names that begin with the side of the group."""
        own = {f"{side}free output {k}": param for k, param in enumerate(self.free_output_coulomb)}
        own |= {f"{side}recovery {k}": param for k, param in enumerate(self.recovery_coulomb)}
        for k, edge in enumerate(self.switches):
            own |= {f"{side}rise {k}": edge.rise_s, f"{side}fall {k}": edge.fall_s, f"{side}output {k}": edge.output_coulomb}
        return own

    def losses(self, carrying: Carrying, block_v, i_on, i_off, hertz, p: Numbers, side: str = "", cycles=1.0) -> Iterator[Loss]:
        """The losses of the main switches that take over `i_on` and give up `i_off` [A] at a blocked voltage.

        cycles: for how large a share of the time this position is the main one, 1 or a half.
        """
        n = len(self.switches)
        free_output = sum(p[f"{side}free output {k}"] for k in range(len(self.free_output_coulomb))) / n
        recovered = sum(p[f"{side}recovery {k}"] for k in range(len(self.recovery_coulomb))) / n
        for k, (leg, share) in enumerate(zip(carrying.position.legs, carrying.shares, strict=True)):
            rise, fall = p[f"{side}rise {k}"], p[f"{side}fall {k}"]
            overlap = overlap_loss_w(block_v, i_on * share, i_off * share, rise, fall, hertz) * cycles
            yield Loss(leg.part, "P_overlap", overlap, "V · (I_on · t_r + I_off · t_f)/2 · f · share",
                       "{} · ({} · {} + {} · {})/2 · {} · {}", (block_v, i_on, rise, i_off, fall, hertz, share * cycles), OVERLAP)
            output = np.maximum(p[f"{side}output {k}"], free_output)
            yield Loss(leg.part, "P_oss", recovery_loss_w(output, block_v, hertz) * cycles, "Q_oss · V · f", "{} · {} · {}",
                       (output * cycles, block_v, hertz), CHARGE)
            yield Loss(leg.part, "P_rr", recovery_loss_w(recovered, block_v, hertz) * cycles, "Q_rr · V · f", "{} · {} · {}",
                       (recovered * cycles, block_v, hertz), RECOVERY)
