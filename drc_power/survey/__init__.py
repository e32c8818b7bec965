"""What an experienced reviewer sees first: where power comes in, what passes and switches it, what is only signal."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from drc_power.netlist.model import Netlist
    from drc_power.survey.model import Survey

__all__ = ["survey_json", "survey_netlist", "survey_text"]


def survey_netlist(netlist: Netlist) -> Survey:
    """Survey a netlist without any annotation. Every voltage in the result is a guess."""
    from drc_power.survey.build import build_survey

    return build_survey(netlist)


def survey_json(survey: Survey) -> dict[str, Any]:
    """The survey as the contract's JSON."""
    from drc_power.survey.show import survey_json as as_json

    return as_json(survey)


def survey_text(survey: Survey, netlist: Netlist | None = None) -> str:
    """The survey as lines for a terminal; part values come from `netlist` where it is given."""
    from drc_power.survey.show import survey_text as as_text

    return as_text(survey, netlist)
