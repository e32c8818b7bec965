"""What an experienced reviewer sees first: where power comes in, what passes and switches it, what is only signal."""

from __future__ import annotations

from drc_power.netlist.model import Netlist
from drc_power.survey.model import Survey

__all__ = ["survey_netlist"]


def survey_netlist(netlist: Netlist) -> Survey:
    """Survey a netlist without any annotation. Every voltage in the result is a guess."""
    from drc_power.survey.build import build_survey

    return build_survey(netlist)
