"""Where the grammar and the pages are: inside the installed package, else beside pyproject.toml."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent.parent


def data_folder(name: str) -> Path:
    """The folder `grammar` or `safety`, in a wheel or in a checkout.

    Raises FileNotFoundError when the installation is incomplete.
    """
    for folder in (_PACKAGE / name, _PACKAGE.parent / name):
        if folder.is_dir():
            return folder
    raise FileNotFoundError(f"wellseq is incompletely installed: no folder '{name}'")
