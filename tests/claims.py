"""The ledger of claims: what the simulator says, beside what the outside world says.

A validation test calls the fixture `claim` once for each number that it compares. The call
asserts, and keeps a row; `pytest --write-claims` writes all rows into `tests/README.md`.
"""

from dataclasses import dataclass
from pathlib import Path

import pytest

README = Path(__file__).with_name("README.md")
BEGIN, END = "<!-- claims: written by pytest --write-claims -->", "<!-- end of claims -->"
LEDGER = pytest.StashKey["dict[str, Row]"]()
SENSES = ("equal", "at least", "at most")
WORST = 3


@dataclass(frozen=True)
class Row:
    """One claim and how it came out.

    Attributes
    ----------
    name : str
        What is claimed, in a few words.
    source : str
        Author, title, year, equation or table; `from memory` where so.
    expected, got : float
        Value of the source and of the simulator, in `unit`.
    tolerance : float
        Allowed deviation: a share of `expected`, or in `unit` where `absolute`.
    unit : str
        Unit of both values; empty where dimensionless.
    why : str
        Reason for the tolerance.
    cause : str
        Where the deviation comes from, as far as it is known.
    absolute : bool
        Whether deviation and tolerance are in `unit` rather than shares.
    sense : str
        `equal`, `at least` or `at most`.
    """

    name: str
    source: str
    expected: float
    got: float
    tolerance: float
    unit: str
    why: str
    cause: str
    absolute: bool
    sense: str

    @property
    def deviation(self) -> float:
        """Got less expected: a share, or in the unit."""
        difference = self.got - self.expected
        return difference if self.absolute else difference / abs(self.expected)

    @property
    def holds(self) -> bool:
        low = -self.tolerance if self.sense != "at most" else float("-inf")
        high = self.tolerance if self.sense != "at least" else float("inf")
        return low <= self.deviation <= high

    @property
    def share(self) -> float:
        """Size of the deviation as a share of the expected value; none for one-sided claims."""
        if self.sense != "equal" or not self.expected:
            return 0.0
        return abs((self.got - self.expected) / self.expected)

    def cells(self) -> list[str]:
        unit = f" {self.unit}" if self.unit else ""
        sense = "" if self.sense == "equal" else f"{self.sense} "
        return [
            self.name,
            self.source,
            f"{sense}{self.expected:.6g}{unit}",
            f"{self.got:.6g}{unit}",
            self.amount(self.deviation, "+.2g"),
            self.amount(self.tolerance, ".2g"),
            self.why,
        ]

    def amount(self, value: float, form: str) -> str:
        if self.absolute:
            return f"{value:{form}} {self.unit}".strip()
        return f"{100 * value:{form}} %"


def pytest_addoption(parser):
    parser.addoption(
        "--write-claims", action="store_true", help="write the table of claims in tests/README.md"
    )


def pytest_configure(config):
    config.stash[LEDGER] = {}


@pytest.fixture
def claim(request):
    """Assert one claim and keep it for the table in tests/README.md."""
    ledger = request.config.stash[LEDGER]

    def check(
        name,
        source,
        expected,
        got,
        tolerance,
        unit,
        why,
        *,
        cause="",
        absolute=False,
        sense="equal",
    ):
        row = Row(
            name, source, float(expected), float(got), float(tolerance), unit, why, cause,
            absolute, sense,
        )  # fmt: skip
        enter(ledger, row)

    return check


def enter(ledger: dict[str, Row], row: Row) -> None:
    """Keep a row and assert it."""
    assert row.sense in SENSES
    assert row.name not in ledger, f"two claims are called '{row.name}'"
    ledger[row.name] = row
    assert row.holds, (
        f"{row.name}: {row.got:.8g} {row.unit} where {row.source} has {row.sense} "
        f"{row.expected:.8g} {row.unit}; off by {row.amount(row.deviation, '+.3g')}, "
        f"allowed {row.amount(row.tolerance, '.3g')}"
    )


def table(rows: list[Row]) -> str:
    """Markdown table of the claims, then the largest deviations with their causes."""
    head = ["claim", "source", "expected", "got", "deviation", "tolerance", "reason for it"]
    lines = [head, ["---"] * len(head), *(row.cells() for row in rows)]
    text = "\n".join("| " + " | ".join(cells) + " |" for cells in lines)
    worst = sorted(rows, key=lambda row: row.share, reverse=True)[:WORST]
    causes = "\n".join(
        f"- **{row.name}** (off by {100 * row.share:.2g} %): {row.cause or row.why}"
        for row in worst
    )
    return f"{text}\n\nThe {WORST} claims that are furthest off, and why:\n\n{causes}"


def rewritten(readme: str, rows: list[Row]) -> str:
    """The text of the README with its table of claims replaced."""
    before, _, rest = readme.partition(BEGIN)
    _, _, after = rest.partition(END)
    return f"{before}{BEGIN}\n\n{table(rows)}\n\n{END}{after}"


def pytest_terminal_summary(terminalreporter, exitstatus, config):
    rows = list(config.stash[LEDGER].values())
    if not rows:
        return
    if not config.getoption("--write-claims"):
        return
    if exitstatus:
        terminalreporter.line("claims not written: a test failed")
        return
    text = README.read_text(encoding="utf-8")
    README.write_text(rewritten(text, rows), encoding="utf-8")
    terminalreporter.line(f"{len(rows)} claims written to {README.name}")
