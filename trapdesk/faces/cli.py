"""The command line: verbs, exit codes, and everything that goes wrong as words on stderr.

Nothing heavy is imported before a verb needs it: help and version answer at once, also on a slow machine.
"""

from __future__ import annotations

import argparse
import difflib
import os
import re
import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from typing import Any, NoReturn, TextIO

from .. import __version__
from ..errors import FileFault, NoAnswer, TrapdeskError, quoted, visible
from . import verb_words

INTERRUPTED = 130


class Misuse(TrapdeskError):
    """A command line that is not one of ours."""

    exit_code = 2


class Parser(argparse.ArgumentParser):
    """A parser that refuses with one line."""

    def error(self, message: str) -> NoReturn:
        """Raise what the user got wrong."""
        raise Misuse(f"{visible(message, 200)}; {self.prog} --help shows what would be right")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    try:
        return _run(given)
    except NoAnswer as error:
        from . import words

        return _say(words.no_answer(error), error.exit_code)
    except TrapdeskError as error:
        return _say(_in_words(error), error.exit_code)
    except KeyboardInterrupt:
        return INTERRUPTED


def _in_words(error: TrapdeskError) -> str:
    """Return an error's text; the rules a design breaks are spoken with labels and units."""
    breaches = getattr(error, "breaches", ())
    if not breaches:
        return str(error)
    from ..store.spoken import spoken

    return "\n".join(str(spoken(breach)) for breach in breaches)


def _say(text: str, code: int) -> int:
    """Put words on stderr; a stderr that is gone is nobody's loss."""
    if sys.stderr is not None:
        _tolerant(sys.stderr)
        try:
            print("\n".join(f"trapdesk: {line}" for line in text.splitlines()), file=sys.stderr)
        except OSError:
            return code
    return code


def _run(given: list[str]) -> int:
    if given and given[0] in VERBS:
        options = _parser_of(given[0]).parse_intermixed_args(_loads_joined(given[1:]))
        with _units_chosen():
            return _write(VERBS[given[0]][1](options))
    parser = Parser(
        prog="trapdesk",
        usage="trapdesk [FILE] | VERB ...",
        description=verb_words.ABOUT,
        epilog=verb_words.ENDING,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"trapdesk {__version__}")
    parser.add_argument("file", nargs="*", metavar="FILE", help="a design, or the name of a preset")
    files = parser.parse_args(given).file
    if len(files) > 1 or (files and not os.path.lexists(files[0])):
        _refuse_verb(files)
    return _desk(files[0] if files else None)


def _loads_joined(given: list[str]) -> list[str]:
    """Return arguments with a load of a minus joined to its option: by itself it would pass for an option."""
    joined: list[str] = []
    for text in given:
        if joined and joined[-1] == "--load" and re.match(r"[-+]\s*[\d.jJ]", text):
            joined[-1] = f"--load={text}"
        else:
            joined.append(text)
    return joined


@contextmanager
def _units_chosen() -> Iterator[None]:
    """Show lengths in the units a person chose to last; what is wrong with the choices is told."""
    from . import shown
    from .desk import config

    chosen, trouble = config.load(config.place(os.environ))
    if trouble:
        _say(trouble, 0)
    before = shown.show_lengths_in(chosen.units)
    try:
        yield
    finally:
        shown.show_lengths_in(before)


def _refuse_verb(files: list[str]) -> None:
    """Refuse what was meant as a verb and is none."""
    near = difflib.get_close_matches(files[0][:30].lower(), VERBS, n=1, cutoff=0.7)
    if not near and len(files) == 1:
        return
    help = f"did you mean {near[0]}?" if near else f"verbs are {', '.join(VERBS)}"
    raise Misuse(f"{quoted(files[0])} is not a known verb; {help}")


def _desk(file: str | None) -> int:
    if not (sys.stdin and sys.stdin.isatty() and sys.stdout and sys.stdout.isatty()):
        if file is not None:
            from ..store import store

            store.find(file)
        raise Misuse("the desk needs a terminal; trapdesk figures FILE prints what it would show")
    from .desk.opening import run

    return run(file)


STAGES = ("as_cut", "tuned", "aimed", "wet")
TYPED = {
    "coil": ("NAME=VALUE", "kind, f, and what it is made from"),
    "tank": ("NAME=VALUE", "f, L, C, R, RD, Q or B"),
    "match": ("NAME=VALUE", "Z and f, and what else is said below"),
    "line": ("TYPE or NAME=VALUE", "a type of line, and length, f, Z or Zin"),
}
"""Verbs that work on what is typed alone, and what that is."""


def _parser_of(verb: str) -> Parser:
    """Return the parser of one verb."""
    about, _, example, more = VERBS[verb]
    parser = Parser(
        prog=f"trapdesk {verb}",
        description=about,
        epilog=f"example:\n  {example}{more}",
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    if verb in TYPED:
        parser.add_argument("values", nargs="+", metavar=TYPED[verb][0], help=TYPED[verb][1])
    else:
        parser.add_argument("file", metavar="FILE", help="a design, or the name of a preset")
    if verb == "figures":
        parser.add_argument(
            "--at",
            action="append",
            default=[],
            metavar="F[,F...]",
            help="also at these frequencies, with units and a decimal point; commas separate them",
        )
    if verb == "tuner":
        parser.add_argument(
            "--load", metavar="Z", help="also what the tuner makes of this load, on each band"
        )
        parser.add_argument("--line", metavar="TYPE", help="as if fed through this type of line")
        parser.add_argument("--length", metavar="LENGTH", help="and so much of it; 25 m unless said")
    if verb == "readings":
        parser.add_argument("values", nargs="*", metavar="NAME=VALUE", help="readings; none lists all kinds")
        parser.add_argument("--keep", action="store_true", help="keep the result in the design's file")
    if verb == "next":
        parser.add_argument("values", nargs="*", metavar="NAME=VALUE", help="readings of the antenna")
        parser.add_argument("--keep", action="store_true", help="keep readings and move in the design")
        parser.add_argument(
            "--moved", action="append", metavar="WIRE=LENGTH", help="what was really done last"
        )
        parser.add_argument("--undo", action="store_true", help="take the last readings and move out again")
        parser.add_argument("--site", metavar="FILE", help="the same antenna at the site of this design")
    if verb == "touchstone":
        parser.add_argument("--band", choices=("lower", "upper"), help="this band alone; both unless said")
        parser.add_argument("--out", metavar="NAME", help="write a file that is not there yet")
    if verb == "rummage":
        parser.add_argument("--box", metavar="FILE", help="what there is; the ready box unless said")
        parser.add_argument("--rows", type=int, default=20, metavar="N", help=verb_words.ROWS)
        parser.add_argument("--take", type=int, metavar="N", help="write the design with the trap of row N")
        parser.add_argument("--out", metavar="NAME", help="to this file, which is not there yet")
        parser.add_argument(
            "--for-yield",
            choices=STAGES,
            metavar="STAGE",
            help="order the rows by their yield at a stage: as_cut, tuned, aimed, wet",
        )
    if verb == "tolerance":
        parser.add_argument("--trials", default="10000", metavar="N", help="antennas; 10000 unless said")
        parser.add_argument("--seed", default="1", metavar="S", help="the same seed, the same antennas")
        parser.add_argument(
            "--for-yield",
            choices=STAGES,
            metavar="STAGE",
            help="also choose trap and aims for the largest yield: as_cut, tuned, aimed, wet",
        )
    parser.add_argument("--json", action="store_true", help="print JSON: SI units, the unit in the key")
    return parser


def _figures_of(file: str) -> Any:
    from ..services.antenna.solve import solve
    from ..store import store

    return solve(store.find(file).design, site_effects=True)


def figures(options: argparse.Namespace) -> str:
    """Return the figures of a design as text or JSON."""
    from .frequencies import frequencies_of

    frequencies = frequencies_of(options.at)
    from ..services.antenna.solve import at_frequencies
    from . import json_out, layout, rows

    found = _figures_of(options.file)
    at = at_frequencies(found, frequencies) if frequencies else ()
    if options.json:
        return json_out.text(json_out.figures(found, at))
    lines = [*layout.summary_lines(found), "", *layout.layout(rows.rows(found))]
    lines += layout.at_lines(found, at) if at else []
    return "\n".join(lines) + "\n"


def sheet(options: argparse.Namespace) -> str:
    """Return the build sheet of a design as text or JSON."""
    from ..services.trials.tolerance import tolerance as ensemble
    from . import json_out
    from . import sheet as paper

    found = _figures_of(options.file)
    trials = ensemble(found, trials=SHEET_TRIALS)
    return json_out.text(paper.document(found, trials)) if options.json else paper.text(found, trials)


def tank(options: argparse.Namespace) -> str:
    """Return a resonator from any sufficient few of its values, as text or JSON."""
    from . import json_out, tank_out

    given, answer = tank_out.answer_to(options.values)
    if options.json:
        return json_out.text(json_out.tank(given, answer))
    return "\n".join(tank_out.lines(given, answer)) + "\n"


def readings(options: argparse.Namespace) -> str:
    """Return what readings of a trap come to, as text or JSON; without any, how each is done."""
    from ..store import store
    from . import json_out, readings_out

    opened = store.find(options.file)
    if not options.values:
        if options.keep:
            raise Misuse("there are no readings to keep; trapdesk readings --help shows how to give them")
        kinds = readings_out.kinds_document() if options.json else readings_out.kinds_lines()
        return json_out.text(kinds) if options.json else "\n".join(kinds) + "\n"
    given = readings_out.parts_of(options.values)
    if options.keep and opened.path is None:
        help = "a preset is never written over: save it under a name of its own first"
        raise FileFault(options.file, "not_writable", help=help)
    sweeps, notes = readings_out.sweeps_of(given)
    found = readings_out.answer(opened.design, given, sweeps)
    if options.keep:
        store.save(readings_out.keep(opened.design, found), opened.path, opened.text)
    if options.json:
        return json_out.text(readings_out.document(found, given, notes, options.keep))
    kept = ["", f"Kept in {visible(options.file, 60)}."] if options.keep else []
    return "\n".join([*readings_out.lines(found, given, notes), *kept]) + "\n"


def next_move(options: argparse.Namespace) -> str:
    """Return what to do next by what was read of the hung antenna, as text or JSON."""
    from . import next_run

    return next_run.run(options)


def touchstone(options: argparse.Namespace) -> str:
    """Return the computed feed impedance as a Touchstone file or JSON."""
    from ..store import sweep_files
    from . import feed_file, json_out

    found = _figures_of(options.file)
    if options.band and options.band not in found.bands:
        raise Misuse(f"the design has no {options.band} band; --band {' or '.join(found.bands)}")
    roles = (options.band,) if options.band else tuple(found.bands)
    data = json_out.text(feed_file.document(found, roles)) if options.json else feed_file.text(found, roles)
    if options.out is None:
        return data
    sweep_files.write_new(options.out, data)
    return ""


SHEET_TRIALS = 2000
"""Trials by which the sheet says how much wire to leave."""


def rummage(options: argparse.Namespace) -> str:
    """Return the best traps a box can build for a design; what is wrong in the box is said after them."""
    from . import rummage_run

    return rummage_run.run(options, _write)


def choices(options: argparse.Namespace) -> str:
    """Return what other trap resonances and other ratios of L to C would do, as text or JSON."""
    from ..services.compare import choices as service
    from ..store import store
    from . import choices_out, json_out

    design = store.find(options.file).design
    found = service.choices(design)
    if options.json:
        return json_out.text(choices_out.document(design, found))
    return "\n".join(choices_out.lines(design, found)) + "\n"


def match(options: argparse.Namespace) -> str:
    """Return every match of a typed load, as text or JSON."""
    from . import match_out

    return match_out.text(options.values, as_json=options.json)


def line(options: argparse.Namespace) -> str:
    """Return what a line does to a typed load, as text or JSON."""
    from . import line_out

    return line_out.text(options.values, as_json=options.json)


def tuner(options: argparse.Namespace) -> str:
    """Return whether a tuner is worth it, its settings and its reach, as text or JSON."""
    from . import tuner_out

    return tuner_out.text(options.file, options.load, options.line, options.length, as_json=options.json)


def tolerance(options: argparse.Namespace) -> str:
    """Return what becomes of a design over many trials, as text or JSON."""
    from . import json_out, tolerance_json, tolerance_out, trial_run

    found = trial_run.run(options.file, options.trials, options.seed, options.for_yield)
    if options.json:
        return json_out.text(tolerance_json.document(*found))
    return "\n".join(tolerance_out.lines(*found)) + "\n"


def coil(options: argparse.Namespace) -> str:
    """Return one coil of any kind, as text or JSON."""
    from . import coil_out, json_out

    answer = coil_out.answer_to(options.values)
    if options.json:
        return json_out.text(coil_out.document(answer))
    return "\n".join(coil_out.lines(answer)) + "\n"


VERBS: dict[str, tuple[str, Callable[[argparse.Namespace], str], str, str]] = {
    "figures": (
        "Print everything computed for a design.",
        figures,
        "trapdesk figures 40-20-vee --at 7.05MHz,14.2MHz",
        "\n\nCommas separate frequencies, so a decimal takes a point: 7.05MHz.",
    ),
    "sheet": (
        "Print the build sheet: what to cut, wind, check and measure, and the hill card.",
        sheet,
        "trapdesk sheet 40-20-vee > sheet.txt",
        "",
    ),
    "rummage": (
        "Print the best traps a box of parts can build for a design, two of each.",
        rummage,
        "trapdesk rummage 40-20-vee --box relief-box --rows 5",
        "\n  trapdesk rummage 40-20-vee --take 2 --out mine.toml\n\n"
        'A box is a TOML file of kind = "box"; relief-box is ready to copy. Ctrl-C keeps\n'
        "what was found so far. --for-yield takes about half a second a row\n"
        "more; brought to aim nearly every trap is good, wet tells them apart.",
    ),
    "choices": (
        "Print what other resonances of the trap and other ratios of L to C would do.",
        choices,
        "trapdesk choices 40-20-vee",
        "",
    ),
    "tolerance": (
        verb_words.TOLERANCE,
        tolerance,
        "trapdesk tolerance 40-20-vee --trials 2000 --seed 7",
        "\n\nCtrl-C stops a long run and prints what there is. What varies stands in the\n"
        "design's table [doubts].",
    ),
    "tank": (
        verb_words.TANK,
        tank,
        "trapdesk tank f=10.05MHz C=47pF Q=180",
        "",
    ),
    "coil": (
        verb_words.COIL,
        coil,
        "trapdesk coil former=40mm wire=AWG14 pitch=2.4mm turns=8 f=14.1MHz",
        "\n  trapdesk coil kind=cable cable=RG-58/U former=50mm f=14.05MHz",
    ),
    "match": (
        verb_words.MATCH,
        match,
        "trapdesk match Z=35-j120 f=7.1MHz",
        "\n  trapdesk match Z=10-j200 f=3.6MHz network=t-clc Lmax=30uH Cmax=250pF",
    ),
    "line": (verb_words.LINE, line, "trapdesk line RG-58/U length=20m f=7.1MHz Z=35-j120", ""),
    "tuner": (verb_words.TUNER, tuner, "trapdesk tuner 40-20-vee --line RG-58/U --length 25m", ""),
    "readings": (
        verb_words.READINGS,
        readings,
        "trapdesk readings 40-20-vee trap.f0=13.98MHz trap.f0_with=11.6MHz,added=22pF",
        "\n\nWhat is to be said of a reading follows it behind commas: doubt=, how=, ...\n"
        "--keep puts the result into the design, where it replaces what is computed.",
    ),
    "next": (
        verb_words.NEXT,
        next_move,
        "trapdesk next 40-20-vee upper.dip=14.02MHz lower.dip=7.02MHz",
        "\n\n  upper.swr@7.05MHz=1.8  lower.swr@3.6MHz=2..3  lower.z@3.6MHz=42-j12\n"
        "  upper.sweep=FILE; each takes ,doubt=... and ,at=feed behind a comma. What was\n"
        "kept is in the design's table [history].",
    ),
    "touchstone": (
        "Print the computed impedance at the feed point as a Touchstone 1 file, .s1p.",
        touchstone,
        "trapdesk touchstone 40-20-vee --band upper > upper.s1p",
        "",
    ),
}
"""What each verb says of itself, what it does, an example, and what else there is to know."""


def _write(text: str) -> int:
    """Put data on stdout: quiet when the reader has gone, in words when there is no room."""
    if sys.stdout is None:
        raise FileFault("standard output", "not_writable", help="it is closed")
    _tolerant(sys.stdout)
    try:
        sys.stdout.write(text)
        sys.stdout.flush()
    except BrokenPipeError:
        _let_go(sys.stdout)
    except OSError as error:
        _let_go(sys.stdout)
        raise FileFault("standard output", "not_writable", help=error.strerror or str(error)) from None
    return 0


def _tolerant(stream: TextIO) -> None:
    """Have letters a stream cannot write appear as escapes; what we write ourselves is plain ASCII."""
    reconfigure = getattr(stream, "reconfigure", None)
    if reconfigure is not None:
        reconfigure(errors="backslashreplace")


def _let_go(stream: TextIO) -> None:
    """Turn a broken stream to nowhere, so that what is left in its buffer harms nobody at exit."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, stream.fileno())
    os.close(nowhere)
