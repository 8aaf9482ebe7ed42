"""No test of the desk touches a person's own state and choices."""

import pytest


@pytest.fixture(autouse=True)
def away_from_home(tmp_path, monkeypatch):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path / "config"))
