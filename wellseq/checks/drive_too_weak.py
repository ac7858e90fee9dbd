"""A drive has fewer volts than have been measured to hold a plasma, or nobody has measured it."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A rotating drive is not known to be strong enough to hold a plasma."
NEEDS = ("timeline", "forecast")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The drive's volts against what has been seen to hold a plasma on that ring, V."""
    yield from foretold(case, "drive-too-weak", at_least(0.0, "V"))
