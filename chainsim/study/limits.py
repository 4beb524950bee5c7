"""Where a lift stops to hold: a coarse scan, then bisection to a stated tolerance.

Pass and fail need not be monotone (a resonance may fail in the middle of a good range), so the
range is scanned first and every change of outcome in it is reported. The change that limits is
then bracketed, and so is the place where the lift stops to hold with its reserve. The answer
names the values on both sides of each bracket: nothing is interpolated.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import replace

from chainsim.closed_forms import halvings
from chainsim.study.amounts import spaced
from chainsim.study.bench import Bench, Variant
from chainsim.study.limit_answer import CLOSE, FAILS, HOLDS, Bracket, Limit, Probe, Stretch
from chainsim.study.limit_question import Question
from chainsim.study.rows import FAILED, weakest

_STRETCHES = 2  # times a scan goes on beyond its range while nothing fails
_NEIGHBORS = 2  # tolerances beyond the bracket at which the answer is tried once more


def find_limit(
    question: Question,
    bench: Bench,
    names: tuple[str, ...] = (),
    tolerance: float = 0.01,
    n_scan: int = 9,
) -> Limit:
    """Find where a lift stops to hold.

    Parameters
    ----------
    question : Question
        What varies, over which range, and which way is harder.
    bench : Bench
        Does the runs.
    names : tuple of str
        Findings that count; empty counts all.
    tolerance : float
        Width of the brackets over their value (dimensionless).
    n_scan : int
        Values of the coarse scan (dimensionless), at least 3.

    Returns
    -------
    Limit
        The answer with all the runs behind it.
    """
    search = _Search(question, bench, names, tolerance)
    search.scan(n_scan)
    fails, reserve = search.brackets()
    fails, reserve = search.narrowed(fails, reserve)
    confirmed = search.confirmed(fails)
    limiting = tuple(weakest(fails.bad.row, names)) if fails else ()
    return Limit(
        question=question,
        scan=search.probes(),
        stretches=search.stretches(),
        fails=fails,
        reserve=reserve,
        limiting=limiting,
        confirmed=confirmed,
        tolerance=tolerance,
    )


class _Search:
    """The values tried so far, and what to try next."""

    def __init__(
        self, question: Question, bench: Bench, names: tuple[str, ...], tolerance: float
    ) -> None:
        self._question = question
        self._bench = bench
        self._names = names
        self._tolerance = tolerance
        self._tried: dict[float, Probe] = {}

    def probes(self) -> tuple[Probe, ...]:
        """All values tried, rising."""
        return tuple(self._tried[value] for value in sorted(self._tried))

    def scan(self, count: int) -> None:
        """Try the range; go on beyond its harder end while nothing fails there."""
        question = self._question
        self._try(spaced(question.low, question.high, count, question.log))
        for _ in range(_STRETCHES):
            if question.harder == 0 or self._outcome(self._easy_first()[-1]) == FAILS:
                return
            self._try([self._beyond()])

    def _beyond(self) -> float:
        """A value beyond the harder end of what was tried."""
        end, before = self._easy_first()[-1].value, self._easy_first()[-2].value
        if self._question.log:
            return end * (end / before) ** 2
        return max(end + 2.0 * (end - before), self._question.least)

    def brackets(self) -> tuple[Bracket | None, Bracket | None]:
        """Changes of outcome, on the way to the harder end, that limit the good region."""
        probes = self._easy_first()
        start = self._start(probes)
        if start is None:
            return None, None
        fails = self._first_change(probes[start:], (FAILS,))
        reserve = None
        if fails is None or self._outcome(probes[start]) != FAILS:
            holding = [p for p in probes[start:] if self._outcome(p) == HOLDS]
            if holding:
                begin = probes.index(holding[0])
                reserve = self._first_change(probes[begin:], (CLOSE, FAILS))
        return fails, reserve

    def _start(self, probes: Sequence[Probe]) -> int | None:
        """Where the way to the limit starts: near the present value if that one is good."""
        good = [i for i, probe in enumerate(probes) if self._outcome(probe) != FAILS]
        if not good:
            return None
        present = self._question.present
        nearest = min(range(len(probes)), key=lambda i: abs(probes[i].value - present))
        if nearest not in good:
            return good[0]
        while nearest - 1 in good:
            nearest -= 1
        return nearest

    def _first_change(self, probes: Sequence[Probe], bad: tuple[str, ...]) -> Bracket | None:
        for good, next_one in itertools.pairwise(probes):
            if self._outcome(good) not in bad and self._outcome(next_one) in bad:
                return Bracket(good, next_one)
        return None

    def narrowed(
        self, fails: Bracket | None, reserve: Bracket | None
    ) -> tuple[Bracket | None, Bracket | None]:
        """Halve both brackets together until each is within the tolerance."""
        pairs = [(fails, (FAILS,)), (reserve, (CLOSE, FAILS))]
        for _ in range(self._rounds(fails, reserve)):
            middles = [self._middle(bracket) for bracket, _ in pairs]
            if not any(middle is not None for middle in middles):
                break
            self._try([middle for middle in middles if middle is not None])
            pairs = [
                (self._halved(bracket, middle, bad), bad)
                for (bracket, bad), middle in zip(pairs, middles, strict=True)
            ]
        return pairs[0][0], pairs[1][0]

    def _rounds(self, *brackets: Bracket | None) -> int:
        """Most halvings that any of the brackets may need."""
        rounds = 0
        for bracket in brackets:
            if bracket is not None:
                width, value = _width(bracket), _scale(bracket)
                rounds = max(rounds, halvings(width, self._tolerance * value) + 1)
        return rounds

    def _middle(self, bracket: Bracket | None) -> float | None:
        """Value in the middle of a bracket, or None where it is narrow enough."""
        if bracket is None or _width(bracket) <= self._tolerance * _scale(bracket):
            return None
        good, bad = bracket.good.value, bracket.bad.value
        middle = math.sqrt(good * bad) if self._question.log else 0.5 * (good + bad)
        middle = self._question.snapped(middle)
        return None if middle in (good, bad) else middle

    def _halved(
        self, bracket: Bracket | None, middle: float | None, bad: tuple[str, ...]
    ) -> Bracket | None:
        if bracket is None or middle is None:
            return bracket
        probe = self._tried[middle]
        if self._outcome(probe) in bad:
            return replace(bracket, bad=probe)
        return replace(bracket, good=probe)

    def confirmed(self, fails: Bracket | None) -> bool:
        """Whether the values a little beyond a bracket agree with it."""
        if fails is None:
            return False
        good, bad = fails.good.value, fails.bad.value
        step = math.copysign(_NEIGHBORS * self._tolerance * _scale(fails), bad - good)
        inner = self._question.snapped(good - step)
        outer = self._question.snapped(bad + step)
        self._try([inner, outer])
        return (
            self._outcome(self._tried[inner]) != FAILS
            and self._outcome(self._tried[outer]) == FAILS
        )

    def stretches(self) -> tuple[Stretch, ...]:
        """Outcomes along all the values tried."""
        found: list[Stretch] = []
        for probe in self.probes():
            word = self._outcome(probe)
            if found and found[-1].outcome == word:
                found[-1] = replace(found[-1], last=probe.value)
            else:
                found.append(Stretch(probe.value, probe.value, word))
        return tuple(found)

    def _easy_first(self) -> list[Probe]:
        probes = list(self.probes())
        return probes[::-1] if self._question.harder < 0 else probes

    def _outcome(self, probe: Probe) -> str:
        return probe.outcome(self._names)

    def _try(self, values: Sequence[float]) -> None:
        snapped = dict.fromkeys(self._question.snapped(value) for value in values)
        new = [value for value in snapped if value not in self._tried]
        variants = [
            Variant(self._question.shown(value), self._question.values(value)) for value in new
        ]
        for value, row in zip(new, self._bench.rows(variants) if new else (), strict=True):
            self._tried[value] = Probe(value, row)


def _width(bracket: Bracket) -> float:
    return abs(bracket.good.value - bracket.bad.value)


def _scale(bracket: Bracket) -> float:
    return max(abs(bracket.good.value), abs(bracket.bad.value))


def completed(limit: Limit) -> bool:
    """Whether every run behind a limit was completed.

    Parameters
    ----------
    limit : Limit
        The limit.

    Returns
    -------
    bool
        False where a value counts as failing because its run could not be completed.
    """
    return all(probe.row.state != FAILED for probe in limit.scan)
