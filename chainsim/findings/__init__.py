"""Findings: what a run showed, each with its value, limit, margin and outcome.

A new finding is one function in the file of its group and one row in `table.ROWS`.
"""

from chainsim.findings.finding import Finding, Measure
from chainsim.findings.situations import Situations, situations
from chainsim.findings.table import GROUPS, judge
from chainsim.findings.verdict import verdict

__all__ = ["GROUPS", "Finding", "Measure", "Situations", "judge", "situations", "verdict"]
