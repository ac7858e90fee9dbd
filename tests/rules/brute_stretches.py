"""Runs of samples in a mask, and where they open and close."""

from __future__ import annotations


def stretches(mask: int, count: int) -> list[tuple[int, int]]:
    """First and last sample of every run of ones."""
    found: list[tuple[int, int]] = []
    for at in range(count):
        if mask >> at & 1:
            if found and found[-1][1] == at - 1:
                found[-1] = found[-1][0], at
            else:
                found.append((at, at))
    return found


def opening(sample: int) -> int:
    """The instant at which a stretch begins whose first sample is this one."""
    return sample - sample % 2


def closing(sample: int) -> int:
    """The instant at which a stretch ends whose last sample is this one."""
    return sample + sample % 2
