"""Answers of studies on the terminal: limits, mends, unsure values, proving runs, step checks."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Group
from rich.table import Table
from rich.text import Text

from chainsim.report.sweep_page import counts_text, reserve_text, short_names
from chainsim.study.limit_answer import Limit
from chainsim.study.limit_estimates import Estimate
from chainsim.study.mend import Mend
from chainsim.study.proving import Proving
from chainsim.study.ranking import reason
from chainsim.study.rows import relative_margin
from chainsim.study.step_check import Drift
from chainsim.study.sweeping import Sweep
from chainsim.study.unsure import Turn, Unsure
from chainsim.units import format_si

LOOKS = {"holds": "", "close": "bold", "fails": "bold reverse", "not judged": "dim"}
SHOWN = 12
"""Most lines of a table on the terminal [dimensionless]."""


def sweep_table(sweep: Sweep) -> Group:
    """Return the summary of a sweep: why the best variant is the best, and the best few.

    Parameters
    ----------
    sweep : Sweep
        The sweep.
    """
    ranked = sweep.ranking()
    axes = [axis.name for axis in sweep.plan.axes]
    table = _table("", "place", *short_names(axes), "outcome", "weakest finding", "its reserve")
    for entry in ranked[:SHOWN]:
        table.add_row(
            str(entry.place),
            *(Text(entry.point.labels[name]) for name in axes),
            outcome_text(entry.outcome),
            words(entry.weakest),
            reserve_text(entry.reserve),
        )
    return Group(Text(counts_text(sweep.rows())), Text(reason(ranked), style="bold"), table)


def list_table(sweep: Sweep) -> Table:
    """Return every point of a sweep with its state.

    Parameters
    ----------
    sweep : Sweep
        The sweep.
    """
    axes = [axis.name for axis in sweep.plan.axes]
    table = _table("", "run", *short_names(axes), "state", "outcome or reason")
    for point, line in sweep.entries():
        state = "to do" if line is None else line.state
        told = "" if line is None else line.text or line.outcome
        labels = (Text(point.labels[name]) for name in axes)
        table.add_row(point.id, *labels, state, Text(told.partition("\n")[0]))
    return table


def limit_table(limit: Limit, estimate: Estimate) -> Group:
    """Return a limit: the answer in sentences, then what gives way, then the scan.

    Parameters
    ----------
    limit : Limit
        The limit.
    estimate : Estimate
        The closed-form estimate beside it.
    """
    question = limit.question
    lines = [Text(sentence) for sentence in limit_sentences(limit, estimate)]
    scan = _table(question.title, "from", "to", "outcome")
    for stretch in limit.stretches:
        scan.add_row(
            question.shown(stretch.first),
            question.shown(stretch.last),
            outcome_text(stretch.outcome),
        )
    return Group(*lines, scan)


def limit_sentences(limit: Limit, estimate: Estimate) -> list[str]:
    """Return a limit in sentences.

    Parameters
    ----------
    limit : Limit
        The limit.
    estimate : Estimate
        The closed-form estimate beside it.
    """
    shown = limit.question.shown
    said = []
    if limit.fails is None:
        ends = f"{shown(limit.scan[0].value)} to {shown(limit.scan[-1].value)}"
        always = {stretch.outcome for stretch in limit.stretches} == {"fails"}
        said.append(f"It fails everywhere from {ends}." if always
                    else f"Nothing gives way anywhere from {ends}.")  # fmt: skip
    else:
        said.append(
            f"It fails at {shown(limit.fails.bad.value)} and no longer at "
            f"{shown(limit.fails.good.value)} ({limit.question.title})."
        )
        first, *others = limit.limiting or ({"name": "the run, which was not completed"},)
        said.append(f"What gives way: {words(first['name'])}.")
        if others:
            near = ", ".join(f"{words(f['name'])} ({f['outcome']})" for f in others[:2])
            said.append(f"Next to it: {near}.")
        if not limit.confirmed:
            said.append("A little beyond these two values the outcome is not the same: see below.")
    if limit.reserve is not None:
        said.append(f"It holds with its reserve at {shown(limit.reserve.good.value)}.")
    elif limit.fails is not None:
        said.append("Nowhere in the scan does it hold with its reserve on the way there.")
    if estimate.value is not None:
        said.append(f"Closed form: {shown(estimate.value)}; {estimate.text}.")
    else:
        said.append(f"Closed form: none; {estimate.text}.")
    lost = [(probe.value, failure) for probe in limit.scan if (failure := probe.row.failure)]
    if lost:
        said.append(
            f"{len(lost)} of {len(limit.scan)} runs could not be completed and count as failing, "
            f"as at {shown(lost[0][0])}: {lost[0][1].text}"
        )
    if sum(stretch.outcome == "fails" for stretch in limit.stretches) > 1:
        said.append("Pass and fail alternate: there are islands, listed below.")
    return said


def mend_table(found: Sequence[Mend]) -> Group:
    """Return the single changes that mend a lift, the smallest first.

    Parameters
    ----------
    found : sequence of Mend
        The changes.
    """
    if not found:
        return Group(Text("No single change of the keys that were tried turns it."))
    table = _table("", "change", "by", "still fails at", "then")
    for change in found:
        bad, good = change.proof
        table.add_row(
            Text(change.text),
            f"{change.value / change.present - 1:+.0%}",
            f"{bad.value:.4g} (run {bad.row.id})",
            Text.assemble(outcome_text(change.outcome), f" (run {good.row.id})"),
        )
    return Group(Text(f"The smallest single change that turns it: {found[0].text}."), table)


def unsure_table(found: Sequence[Unsure], kinds: dict[str, str | None]) -> Group:
    """Return what each unsure value does, what to measure first standing first.

    Parameters
    ----------
    found : sequence of Unsure
        The values.
    kinds : dict of str to (str or None)
        Unit kind of each value by its key.
    """
    turning = [entry for entry in found if entry.turns]
    if turning:
        said = "Measure first: " + ", ".join(entry.key for entry in turning[:3]) + "."
    else:
        said = "No finding turns at the end of any unsure value's range, one value at a time."
    table = _table("", "value", "low", "typical", "high", "turns", "largest swing of a margin")
    for entry in found[: max(SHOWN, len(turning))]:
        kind = kinds.get(entry.key)
        ends = (entry.low, entry.typical, entry.high)
        turns = "; ".join(
            [turn_text("low", turn) for turn in entry.at_low]
            + [turn_text("high", turn) for turn in entry.at_high]
            + [f"not completed at {reason_}" for reason_ in entry.not_completed]
        )
        table.add_row(
            entry.key,
            *(format_si(value, kind) if kind else f"{value:g}" for value in ends),
            Text(turns or "nothing"),
            f"{entry.swing:.0%} {words(entry.swinging)}" if entry.swinging else "–",
        )
    return Group(Text(said, style="bold"), table)


def turn_text(end: str, turn: Turn) -> str:
    """Return a turn in words, such as ``rate met fails at low``."""
    return f"{words(turn.finding)} {turn.after} at {end} ({turn.before} before)"


def proving_table(proof: Proving) -> Group:
    """Return findings by situation, with the situation in which each has the least reserve.

    Parameters
    ----------
    proof : Proving
        The proving run.
    """
    table = _table("", "finding", *proof.rows, "least reserve in")
    for name in proof.findings:
        worst = proof.worst(name)
        cells = [outcome_text(proof.outcome(name, situation)) for situation in proof.rows]
        where = f"{worst[0]} ({reserve_text(relative_margin(worst[1]))})" if worst else "–"
        table.add_row(words(name), *cells, where)
    lines = [Text(f"Not run: {name}: {why}") for name, why in proof.not_run.items()]
    return Group(table, *lines)


def drift_table(found: Sequence[Drift]) -> Table:
    """Return how far each finding moves with the step.

    Parameters
    ----------
    found : sequence of Drift
        Drift of each finding.
    """
    table = _table("", "finding", "full step", "half", "quarter", "moved", "order", "outcome")
    for drift in found:
        values = (drift.full, drift.half, drift.quarter)
        table.add_row(
            words(drift.name),
            *(f"{value:.5g} {drift.unit}" if value is not None else "–" for value in values),
            f"{drift.moved:.2%} of its scale" if drift.moved is not None else "–",
            f"{drift.order:.1f}" if drift.order is not None else "–",
            Text(" → ".join(drift.outcomes), style="bold reverse")
            if drift.turned
            else outcome_text(drift.outcomes[0]),
        )
    return table


def outcome_text(word: str) -> Text:
    """Return an outcome as a word in its look."""
    return Text(word, style=LOOKS.get(word, "dim"))


def words(name: str) -> str:
    """Return a name in words."""
    return name.replace("_", " ")


def _table(title: str, *headings: str) -> Table:
    table = Table(title=title or None, title_justify="left", title_style="bold")
    for heading in headings:
        table.add_column(heading)
    return table
