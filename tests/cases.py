"""Cases of documents and of the independent reference computations, as test parameters."""

import json
import tomllib
from pathlib import Path

import pytest

HERE = Path(__file__).parent


def published(*names):
    """Return the cases of `published/<name>.toml`, one test each."""
    found = []
    for name in names:
        document = tomllib.loads((HERE / "published" / f"{name}.toml").read_text("utf-8"))
        found += [pytest.param(case, id=f"{name}: {case['id']}") for case in document["case"]]
    return found


def reference(name, prefix):
    """Return the cases of `reference/<name>.json` whose id starts so, one test each."""
    document = json.loads((HERE / "reference" / f"{name}.json").read_text("utf-8"))
    found = [pytest.param(case, id=case["id"]) for case in document["cases"] if case["id"].startswith(prefix)]
    assert found, f"no case {prefix} in {name}.json"
    return found
