"""What all tests share: where expected values come from, and the count of them."""

from collections import Counter
from pathlib import Path

import pytest

KINDS = {"P": "published", "L": "library", "C": "computed", "S": "invented"}
REFERENCE = Path(__file__).parent / "reference"


def pytest_collection_modifyitems(items):
    """Refuse a source without a known kind or a citation; hand it to the report."""
    for item in items:
        for marker in item.iter_markers("source"):
            kind, citation = (*marker.args, "", "")[:2]
            if kind not in KINDS or not str(citation).strip():
                raise pytest.UsageError(
                    f"{item.nodeid}: source() takes a kind ({', '.join(KINDS)}) and a citation"
                )
            item.user_properties.append(("source", kind))


def pytest_terminal_summary(terminalreporter):
    """Print how many passed checks rest on each kind of source."""
    passed = Counter(
        value
        for report in terminalreporter.stats.get("passed", [])
        if report.when == "call"
        for name, value in report.user_properties
        if name == "source"
    )
    told = ", ".join(f"{word} {passed[kind]}" for kind, word in KINDS.items())
    terminalreporter.write_line(f"checks by source: {told}")


@pytest.fixture(scope="session")
def reference():
    """The folder of reference data, kept as published."""
    return REFERENCE
