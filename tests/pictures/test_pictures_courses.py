"""Courses: the volts of every electrode as drawn, thinned without losing an extreme."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import made_case
import numpy as np
import pytest

from wellseq.emit.pictures import courses as module
from wellseq.emit.pictures.courses import corners_placed, courses
from wellseq.emit.pictures.score import score
from wellseq.timeline.timeline import Piece, Shape, Timeline


def made() -> Timeline:
    found = made_case.case().timeline
    assert found is not None
    return found


def test_a_course_is_what_the_pieces_say_at_every_instant() -> None:
    drawn = {one.output: one for one in courses(made(), score(made()))}
    for piece in made().blocks[0].pieces:
        for share in (Fraction(0), Fraction(1, 7), Fraction(1, 2), Fraction(9, 10), Fraction(1)):
            at = piece.start_s + (piece.end_s - piece.start_s) * share
            assert drawn[piece.output].at(0, float(at)) == pytest.approx(piece.at(at), abs=1e-9)
    assert drawn["lv1"].at(1, 0.002) == 100.0
    assert drawn["lv1"].ends_V == (0.0, 100.0)


def test_a_switch_shows_what_is_behind_it() -> None:
    gate = next(one for one in courses(made(), score(made())) if one.output == "hv")
    assert gate.electrodes == ("G4",)
    assert gate.at(0, 0.005) == 20.0
    assert gate.at(1, 0.0003) == -900.0
    assert gate.at(1, 0.0025) == pytest.approx(10.0)
    assert gate.ends_V == (-900.0, 20.0)


def test_corners_never_go_back_and_half_cosines_are_bent() -> None:
    axis = score(made())
    for course in courses(made(), axis):
        for stretch in course.stretches:
            place, volts = corners_placed(stretch, axis)
            assert np.all(np.diff(place) >= 0)
            assert len(place) == len(volts)
    bent = next(one for one in courses(made(), axis) if one.output == "lv2")
    assert len(corners_placed(bent.stretches[0], axis)[0]) > module.BENDS


def test_a_long_course_keeps_its_extremes() -> None:
    block = made().blocks[0]
    tick = Fraction(1, 10**6)
    noise = np.random.default_rng(3).uniform(-5, 5, 9001).tolist()
    pieces = tuple(
        Piece("lv1", tick * n, tick * (n + 1), noise[n], noise[n + 1], Shape.STRAIGHT, 0)
        for n in range(9000)
    )
    long = replace(block, pieces=pieces, volts={**block.volts, "lv1": noise[0]})
    timeline = replace(made(), blocks=(long, made().blocks[1]))
    course = next(one for one in courses(timeline, score(timeline)) if one.output == "lv1")
    assert course.corners > 9000
    assert course.kept < 4 * module.BUCKETS + 10
    assert course.ends_V == (min(noise), 100.0)
    assert course.stretches[0].volts_V.max() == max(noise)
