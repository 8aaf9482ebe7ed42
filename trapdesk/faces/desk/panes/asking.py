"""What can be asked in the views of texts: a design for the largest yield, a load for the tuner."""

from __future__ import annotations

from ....errors import TrapdeskError, visible
from ..view import Acting
from .jobs import FOR_YIELD

YIELD_KEYS = (("Enter", "choose for yield"), ("a", "accept that design"))
LOAD_KEYS = (("Enter", "read off a load"),)
STAGES = ("as_cut", "tuned", "aimed", "wet")


def yield_press(key: str, acting: Acting) -> bool:
    """Ask for which stage to choose a design, or accept the one chosen."""
    if key == "enter":
        names = ", ".join(STAGES)
        acting.ask(f"for the largest yield at ({names})", lambda given: _stage(given, acting), "aimed")
    elif key == "a":
        _accept(acting)
    else:
        return False
    return True


def _stage(given: str, acting: Acting) -> None:
    if given and given not in STAGES:
        acting.say(f"{visible(given, 30)} is no stage: {', '.join(STAGES)}", refused=True)
        return
    acting.session.aside.stage = given
    acting.say("")
    acting.show_again()


def _accept(acting: Acting) -> None:
    session = acting.session
    chosen = session.aside.found(FOR_YIELD.name)
    if chosen is None or not session.aside.fresh(FOR_YIELD):
        acting.say("no design was chosen yet; Enter has one looked for", refused=True)
        return
    try:
        changed = session.take(chosen.design)
    except TrapdeskError as error:
        acting.say("; ".join(str(error).splitlines()), refused=True)
        return
    if not changed:
        acting.say("as before: nothing near the design does better")
        return
    session.aside.stage = ""
    acting.say("accepted; u undoes it")
    acting.changed()


def load_press(key: str, acting: Acting) -> bool:
    """Ask for a load to read off the map."""
    if key != "enter":
        return False
    acting.ask("load in ohm", lambda given: _load(given, acting), acting.session.aside.load or "35-j120")
    return True


def _load(given: str, acting: Acting) -> None:
    from ....units import units

    if given:
        try:
            if units.read_impedance(given).real <= 0:
                acting.say("the resistance of a load is above 0, for example 35-j120", refused=True)
                return
        except TrapdeskError as error:
            acting.say("; ".join(str(error).splitlines()), refused=True)
            return
    acting.session.aside.load = given
    acting.say("")
    acting.show_again()
