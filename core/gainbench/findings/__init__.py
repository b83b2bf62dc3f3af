"""Findings: what an assessment means, each with its reason and the next thing to try."""

from __future__ import annotations

from gainbench.findings.case import Case
from gainbench.findings.judging import judge

__all__ = ["Case", "judge"]
