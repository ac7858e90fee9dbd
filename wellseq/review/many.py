"""Files and folders → what was found in each, in their order, several at a time.

A folder stands for every `*.well` below it that holds a sequence; files for others to use are
examined through those.  What nothing uses, and a folder without any sequence, is not examined, and
says so: silence is never a pass.
"""

from __future__ import annotations

import os
from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from contextlib import nullcontext
from dataclasses import dataclass, replace
from pathlib import Path

from wellseq.base.finding import Finding, Mistake, Verdict
from wellseq.base.place import Place
from wellseq.base.unsaved import unsaved
from wellseq.emit.examined import Examined, examined
from wellseq.emit.fingerprints import fingerprints
from wellseq.emit.outline import has_sequence
from wellseq.pipeline import compile_file
from wellseq.review.revisions import NoRevision, at_revision
from wellseq.review.tidying import files_of
from wellseq.text.read import decode, read_bytes

TOGETHER_FROM = 4
"""Fewer files than this are not worth the start of other processes."""
Tell = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class Job:
    """One file to examine.

    `content` stands for the file where it is not on the disk; `since` is the revision whose
    findings are set aside.
    """

    file: str
    lets: Mapping[str, str]
    content: bytes | None = None
    since: str = ""


@dataclass(frozen=True, slots=True)
class Asked:
    """What a list of files and folders comes to: jobs, files for others, and what cannot be."""

    jobs: tuple[Job, ...]
    libraries: tuple[str, ...]
    wrong: tuple[Examined, ...]


def asked(
    names: Iterable[str],
    lets: Mapping[str, str],
    *,
    given: tuple[str, bytes] | None = None,
    since: str = "",
) -> Asked:
    """The jobs of names as written on a command line; `given` is the file behind `-`."""
    jobs: list[Job] = []
    libraries: list[str] = []
    wrong: list[Examined] = []
    for name in names:
        if name == "-" and given is not None:
            jobs.append(Job(given[0], lets, given[1], since))
            continue
        if not os.path.isdir(name):
            jobs.append(Job(name, lets, None, since))
            continue
        found = list(files_of([name]))
        sequences = [file for file in found if _is_sequence(file)]
        jobs += [Job(file, lets, None, since) for file in sequences]
        libraries += [file for file in found if file not in set(sequences)]
        if not sequences:
            wrong.append(_nothing(name, "no sequence stands in this folder or below it"))
    return Asked(tuple(jobs), tuple(libraries), tuple(wrong))


def _is_sequence(file: str) -> bool:
    content = read_bytes(Path(file), file)
    text = content if isinstance(content, Mistake) else decode(content, file)
    return isinstance(text, Mistake) or has_sequence(text, file)


def _nothing(shown: str, why: str) -> Examined:
    finding = Finding("unreadable-file", Verdict.FAIL, why, Place(shown), "name a sequence")
    return Examined(shown, (finding,), ("unreadable-file",))


def examine_all(wanted: Asked, workers: int, tell: Tell | None = None) -> list[Examined]:
    """Examine everything that was asked for, in order; `tell(done, of)` is called on the way.

    With several workers and files enough, each worker is a process of its own.
    """
    things: list[Examined] = []
    used: set[str] = set()
    count = len(wanted.jobs)
    for number, (thing, files) in enumerate(_results(wanted.jobs, workers), start=1):
        things.append(thing)
        used |= files
        if tell is not None:
            tell(number, count)
    for library in wanted.libraries:
        if os.path.realpath(library) not in used:
            why = "it holds no sequence, and no file examined with it uses it"
            things.append(Examined(library, (), (), (("every check", why),)))
    return [*things, *wanted.wrong]


def _results(jobs: Sequence[Job], workers: int) -> Iterator[tuple[Examined, set[str]]]:
    if workers < 2 or len(jobs) < TOGETHER_FROM:
        yield from map(examine, jobs)
        return
    from concurrent.futures import ProcessPoolExecutor
    from multiprocessing import get_context

    # Forked children of a process with threads may hang; fresh ones start slower and never do.
    with ProcessPoolExecutor(min(workers, len(jobs)), get_context("spawn")) as pool:
        yield from pool.map(examine, jobs, chunksize=max(1, len(jobs) // (8 * workers)))


def examine(job: Job) -> tuple[Examined, set[str]]:
    """What was found in one file, and the real paths of all files that were read for it."""
    buffers = {Path(job.file): job.content} if job.content is not None else {}
    with unsaved(buffers) if buffers else nullcontext():
        case = compile_file(job.file, lets=job.lets)
    thing = examined(case)
    files = {os.path.realpath(source.shown) for source in case.sources}
    if job.since:
        thing = _since(thing, job)
    return thing, files


def _since(thing: Examined, job: Job) -> Examined:
    """The thing without what blocked at the revision already."""
    try:
        with at_revision(Path(job.file), job.since) as old:
            if old is None:
                return replace(thing, against=job.since)
            before = examined(compile_file(old, lets=job.lets, shown=Path(job.file).as_posix()))
    except NoRevision as why:
        finding = Finding("unreadable-file", Verdict.FAIL, str(why), Place(job.file))
        return replace(thing, findings=(finding, *thing.findings))
    there = Counter(
        print_
        for print_, one in zip(fingerprints(before, before.findings), before.findings, strict=True)
        if one.blocks
    )
    kept: list[Finding] = []
    for finding, print_ in zip(thing.findings, fingerprints(thing, thing.findings), strict=True):
        if finding.blocks and there[print_] > 0:
            there[print_] -= 1
        else:
            kept.append(finding)
    aside = len(thing.findings) - len(kept)
    return replace(thing, findings=tuple(kept), against=job.since, set_aside=aside)
