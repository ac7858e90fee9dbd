"""wellseq: sequences for the electrodes of Penning-Malmberg traps, compiled and checked.

Names are looked up when they are first used, so that `import wellseq` costs nothing.
"""

from __future__ import annotations

from importlib import import_module

from wellseq.version import __version__

_AT = {
    "load_trap": "wellseq.pipeline",
    "compile_file": "wellseq.pipeline",
    "build": "wellseq.pipeline",
    "verify": "wellseq.pipeline",
    "Field": "wellseq.fields.field",
    "species": "wellseq.model.species",
}

__all__ = ["Field", "__version__", "build", "compile_file", "load_trap", "species", "verify"]


def __getattr__(name: str) -> object:
    if name not in _AT:
        raise AttributeError(f"module 'wellseq' has no attribute '{name}'")
    value = getattr(import_module(_AT[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted([*globals(), *_AT])
