"""What all tests share: one thread for the linear algebra, and the table of the benches at the end."""

import os

# Read by the linear algebra library when numpy is first imported, so set before anything below.
for _name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[_name] = "1"
# What a person chose to last, such as feet and inches, is no part of a test.
os.environ["XDG_CONFIG_HOME"] = os.path.join(os.path.dirname(__file__), "no-choices")

from dataclasses import asdict  # noqa: E402

import pytest  # noqa: E402
from hypothesis import settings  # noqa: E402

from tests.bench import yardstick  # noqa: E402 - numpy comes in here and must find the threads set

# The same examples on every machine and in every run.
settings.register_profile("same", derandomize=True)
settings.load_profile("same")


def pytest_sessionfinish(session):
    """Hand the records of one of several test processes to the one that prints them."""
    if hasattr(session.config, "workeroutput"):
        session.config.workeroutput["bench"] = [asdict(record) for record in yardstick.RECORDS]


@pytest.hookimpl(optionalhook=True)
def pytest_testnodedown(node, error):
    yardstick.RECORDS.extend(yardstick.Record(**record) for record in node.workeroutput.get("bench", []))


def pytest_terminal_summary(terminalreporter):
    lines = yardstick.table(yardstick.RECORDS)
    if lines:
        unit = 1e3 * yardstick.yardstick()
        terminalreporter.section("bench")
        for line in lines:
            terminalreporter.write_line(line)
        size, systems = yardstick.SIZE, yardstick.SYSTEMS
        terminalreporter.write_line(
            f"1 = {systems} complex solves of {size} x {size} on one thread, {unit:.3g} ms here"
        )
