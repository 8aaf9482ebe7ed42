"""The ensemble in text, in JSON, on sheet and card, and from the command line."""

import json
import os
import re
import signal
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from trapdesk.design.design import with_value
from trapdesk.design.parts import Sealing
from trapdesk.faces import cli, hill_card, json_out, sheet, tolerance_json, tolerance_out, trial_run
from trapdesk.services.antenna.solve import solve
from trapdesk.services.trials.advice import improvements
from trapdesk.services.trials.beliefs import CAUSES, QUANTITIES
from trapdesk.services.trials.ensemble import Ensemble
from trapdesk.services.trials.tolerance import Yield, tolerance, yield_of
from trapdesk.services.trials.traps import STAGES
from trapdesk.store import store

ROOT = Path(__file__).resolve().parent.parent
DESIGN = with_value(store.preset("40-20-vee")[0], "antenna.trap.weather.sealing", Sealing.TAPE)
FIGURES = solve(DESIGN, site_effects=True)
ENSEMBLE = Ensemble(FIGURES)
FOUND = tolerance(FIGURES, trials=1000, seed=9, ensemble=ENSEMBLE)
ADVICE = improvements(ENSEMBLE, trials=300)
TEXT = tolerance_out.lines(FOUND, ADVICE)
NOT_A_NUMBER = re.compile(r"\bnan\b", re.IGNORECASE)


def test_fits_a_terminal():
    assert max(map(len, TEXT)) <= 79
    assert all(line.isascii() and line == line.rstrip() for line in TEXT)


@pytest.mark.parametrize("name", store.presets())
@pytest.mark.parametrize("trials", [2, 100])
def test_few_trials_of_any_preset_read_well(name, trials):
    figures = solve(store.preset(name)[0])
    ensemble = Ensemble(figures)
    text = tolerance_out.lines(
        tolerance(figures, trials=trials, ensemble=ensemble), improvements(ensemble, trials=2)
    )
    assert max(map(len, text)) <= 79
    # A column never touches the one before it.
    assert not [line for line in text if re.search(r"[)%][0-9>]", line)]
    assert text == [line.rstrip() for line in text]


@pytest.mark.parametrize("trials", [2, 10, 400, 1000, 10_000, 10_000_000])
def test_no_share_of_any_run_fills_its_column(trials):
    for passed in {0, 1, 3, trials // 10, trials // 2, trials - 3, trials - 1, trials}:
        if 0 <= passed <= trials:
            cell = tolerance_out.chance(yield_of(passed, trials)).replace(" %", "")
            share, low, high = (float(text) for text in re.split(r"[ (-]+", cell.rstrip(")")))
            assert len(cell) <= 19 and low <= share <= high
            # All and none only where they are.
            assert (share == 100) == (passed == trials) and (share == 0) == (passed == 0)


def test_bands_go_by_their_names():
    assert not re.search(r"\b(upper|lower)\b", "\n".join(TEXT))
    assert "20 m" in TEXT[3] and "40 m" in TEXT[3]


def test_seed_and_trials_are_said():
    assert "1000 trials, seed 9" in TEXT[0]
    stopped = replace(FOUND, wanted_trials=5000)
    assert "stopped before 5000" in " ".join(tolerance_out.lines(stopped)[:2])


def test_every_stage_and_cause_has_words():
    assert set(tolerance_out.STAGES) == set(tolerance_out.STAGE_HELP) == {stage.name for stage in STAGES}
    assert set(tolerance_out.CAUSE_NAMES) == set(CAUSES)
    assert set(tolerance_out.STEPS) >= {step.code for step in ADVICE.steps}


def test_every_doubt_of_the_design_is_listed_with_its_meaning():
    text = " ".join(" ".join(TEXT).split())
    assert "capacitor +-5 %, limits" in text
    assert "site +-0.7 %, 2 sigma" in text
    assert "sealing 0.5 % to 2 %" in text
    for name in FOUND.varying:
        assert name in QUANTITIES and tolerance_out.belief_text(name, FOUND.varying[name])


@pytest.mark.parametrize(
    ("share", "text"),
    [(0.0, "0 %"), (1.0, "100 %"), (0.9996, "99.9 %"), (0.0001, "0.1 %"), (0.5, "50 %"), (0.993, "99.3 %")],
)
def test_a_share_is_never_all_when_some_are_missing(share, text):
    assert tolerance_out.percent(share) == text


def test_an_interval_near_an_end_is_finer():
    few = Yield(share=0.0, low=0.0, high=0.842, passed=0, trials=2)
    assert tolerance_out.chance(Yield(share=0.11, low=0.108, high=0.113, passed=11, trials=100)) == (
        "11.0 % (10.8-11.3)"
    )
    assert tolerance_out.chance(few) == "0 % (0-85)"  # outward: the interval is never told narrower
    assert tolerance_out.chance(yield_of(9998, 10_000)) == "99.98 % (99.92-99.99)"
    assert tolerance_out.chance(Yield(share=0.5, low=0.47, high=0.53, passed=5, trials=10)) == "50 % (47-53)"
    assert (
        tolerance_out.chance(Yield(share=1.0, low=0.9963, high=1.0, passed=1, trials=1)) == "100 % (99.6-100)"
    )


def test_a_strip_holds_every_trial_and_marks_the_limit():
    result = FOUND.stages["as_cut"].bands["upper"].results["dip"]
    strip = tolerance_out.strip(result, result.edges[0], result.edges[-1], 40)
    assert len(strip) == 40 and "@" in strip
    single = replace(result, counts=np.eye(96, dtype=int)[95], edges=np.linspace(0.0, 1.0, 97))
    assert tolerance_out.strip(single, 0.0, 1.0, 10) == " " * 9 + "@"
    # What lies beyond the axis is put at its end, not dropped.
    assert tolerance_out.strip(single, 0.0, 0.5, 10).endswith("@")
    marks = tolerance_out.histograms(FOUND, "upper")
    assert any("[" in line and "]" in line and "^" in line for line in marks)
    assert any("!" in line and "|" not in line for line in marks)


def test_all_off_is_said():
    still = ENSEMBLE.with_beliefs({})
    text = " ".join(" ".join(tolerance_out.lines(tolerance(FIGURES, trials=50, ensemble=still))).split())
    assert "nothing varies" in text and "capacitor off" in text
    assert "each inner wire: as computed, for nothing varies" in text and "more wire" not in text
    assert not NOT_A_NUMBER.search(text)


def test_few_trials_say_that_they_are_few():
    text = " ".join(tolerance_out.lines(tolerance(FIGURES, trials=2, ensemble=ENSEMBLE)))
    assert text.count("Too few trials") == 1 and not NOT_A_NUMBER.search(text)
    assert "does not scatter" not in text


def test_json_is_si_and_whole():
    document = json.loads(json_out.text(tolerance_json.document(FOUND, ADVICE)))
    assert (document["format"], document["seed"], document["trials"]) == (1, 9, 1000)
    assert list(document["stages"]) == [stage.name for stage in STAGES]
    band = document["stages"]["as_cut"]["bands"]["upper"]
    assert 13.5e6 < band["dip_hz"]["p5"] < band["dip_hz"]["p50"] < band["dip_hz"]["p95"] < 14.9e6
    assert set(band["dip_hz"]["causes"]) <= set(CAUSES)
    assert document["cutting"]["inner"]["allowance_m"] > 0
    assert document["advice"]["steps"][0]["gain"] > 0
    assert document["varies"]["capacitor"] == {"low": -0.05, "high": 0.05, "meaning": "limits", "alike": 0.5}


def test_sheet_and_card_say_how_much_to_leave():
    text = " ".join(sheet.text(FIGURES, FOUND).split())
    assert "beyond its mark" in text and "the chance of having to add wire stays below 5 %" in text
    card = hill_card.lines(FIGURES, FOUND)
    assert len(card) < 24 and max(map(len, card)) <= 79
    assert any(line.startswith("Leave each inner wire") for line in card)
    assert sheet.document(FIGURES, FOUND)["tolerance"]["trials"] == 1000


def run(capsys, *arguments):
    code = cli.main(list(arguments))
    captured = capsys.readouterr()
    return code, captured.out, captured.err


def test_command(capsys, tmp_path):
    text = (ROOT / "presets/40-20-vee.toml").read_text("utf-8")
    taped = tmp_path / "taped.toml"
    taped.write_text(f'{text}\n[antenna.trap.weather]\nsealing = "tape"\n', "utf-8")
    code, out, err = run(capsys, "tolerance", str(taped), "--trials", "1_000", "--seed", "9")
    assert (code, err) == (0, "")
    # The figures of the verb know nothing of the site's effects, which change nothing here.
    assert out.splitlines()[2:9] == TEXT[2:9]


@pytest.mark.parametrize(
    ("option", "value", "words"),
    [
        ("--trials", "0", "2 to 10000000"),
        ("--trials", "1", "one antenna tells nothing of the others"),
        ("--trials", "99999999999", "2 to 10000000"),
        ("--trials", "many", "not a whole number"),
        ("--trials", "1e4", "not a whole number"),
        ("--trials", "", "not a whole number"),
        ("--seed", "-1", "0 to"),
        ("--seed", "1.5", "not a whole number"),
    ],
)
def test_bad_numbers_end_in_one_line(capsys, option, value, words):
    code, out, err = run(capsys, "tolerance", "40-20-vee", f"{option}={value}")
    assert (code, out) == (2, "")
    assert err.count("\n") == 1 and option in err and words in err


@pytest.mark.parametrize(
    ("line", "words"),
    [
        ('capacitor = "120 %"', "is more than 1"),
        ('capacitor = "60 %"\ncapacitor_meaning = "2 sigma"', "nothing or less"),
        ('capacitor_meaning = "3 signa"', "3 sigma"),
        ('marking = "1 kg"', "doubts.marking"),
        ('rain_least = "2 %"\nrain_most = "1 %"', "no more than rain_most"),
    ],
)
def test_bad_doubts_are_refused_in_words(tmp_path, capsys, line, words):
    file = tmp_path / "design.toml"
    text = store.preset("40-20-vee")[1]
    file.write_text(f"{text}\n[doubts]\n{line}\n", "utf-8")
    code, out, err = run(capsys, "tolerance", str(file))
    assert (code, out) == (2, "") and words in err and "Traceback" not in err


def test_doubts_in_a_file_count(tmp_path, capsys):
    file = tmp_path / "design.toml"
    file.write_text(f'{store.preset("40-20-vee")[1]}\n[doubts]\ncapacitor = "1 %"\nsite = "0 %"\n', "utf-8")
    code, out, _ = run(capsys, "tolerance", str(file), "--trials", "200")
    text = " ".join(out.split())
    assert code == 0 and "capacitor +-1 %, limits" in text and "site off" in text


def test_whole_numbers():
    assert trial_run.whole("--seed", " 10_000 ", 0, 10**6, "1") == 10_000


def test_a_long_run_tells_where_it_is_and_stops_on_the_first_interrupt():
    command = [sys.executable, "-m", "trapdesk", "tolerance", "40-20-vee", "--trials", "2000000", "--json"]
    running = subprocess.Popen(
        command, cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, env=os.environ
    )
    first = running.stderr.readline()
    time.sleep(0.3)
    running.send_signal(signal.SIGINT)
    out, err = running.communicate(timeout=120)
    assert "of 2000000 trials; Ctrl-C stops and keeps them" in first and "Traceback" not in err
    document = json.loads(out)
    assert running.returncode == 0 and document["stopped"] and 0 < document["trials"] < 2_000_000


def test_without_a_trap_none_is_tuned_and_one_band_is_not_both():
    plain = store.preset("40-20-vee")[0]
    lengths = replace(plain.antenna.lengths, end=None)
    design = replace(
        plain,
        bands=replace(plain.bands, upper=None),
        antenna=replace(plain.antenna, trap=None, lengths=lengths),
    )
    figures = solve(design)
    found = tolerance(figures, trials=200)
    lost = replace(found, stages={n: replace(s, unreached=0.1) for n, s in found.stages.items()})
    for told in (tolerance_out.lines(lost), sheet.text(figures, found).splitlines()):
        assert not re.search(r"tuned|both bands|both aims", " ".join(told))
    assert "as cut" in "\n".join(tolerance_out.lines(lost))
    assert "brought the band to its aim" in " ".join(tolerance_out.lines(lost))
