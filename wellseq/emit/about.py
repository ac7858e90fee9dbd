"""The name of a finding → what is known about it: one sentence, and its page."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from wellseq.base.data import data_folder
from wellseq.checks.judging import check, check_names

OWN = {
    "not-examined": "A file was not examined wholly; nothing is said of what was not looked at.",
    "known-not-met": "A finding listed as known is not there any more; take it off the list.",
    "known-unreadable": "The list of known findings cannot be read, and so accepts nothing.",
}
"""What reports themselves can find, apart from the checks."""


@dataclass(frozen=True, slots=True)
class About:
    """A finding's name, one sentence on it, and its page as Markdown."""

    name: str
    says: str
    page: str


@lru_cache(maxsize=256)
def about(name: str) -> About:
    """What the house knows about a finding; a name that it does not know stands for itself."""
    page = _page(name)
    if name in check_names():
        return About(name, check(name).SAYS, page)
    says = OWN.get(name) or _first_sentence(page) or f"{name}."
    return About(name, says, page or says)


def _page(name: str) -> str:
    safety = data_folder("safety")
    if not re.fullmatch(r"[a-z0-9-]+", name):
        return ""
    for folder in ("checks", "verify", "reports"):
        file = safety / folder / f"{name}.md"
        if file.is_file():
            return file.read_text("utf-8")
    return ""


def _first_sentence(page: str) -> str:
    """The first sentence of a page's first paragraph, its bold head left out."""
    for paragraph in page.split("\n\n")[1:]:
        text = re.sub(r"\*\*[^*]+\*\*", "", " ".join(paragraph.split())).strip()
        if text and not text.startswith("#"):
            return text.partition(". ")[0].rstrip(".") + "."
    return ""
