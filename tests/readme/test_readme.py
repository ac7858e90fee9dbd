"""What the README shows is what happens: its console blocks are run, its outputs compared."""

import re
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def consoles(text):
    """Commands with the output shown below each, in order."""
    found = []
    for block in re.findall(r"```console\n(.*?)```", text, re.DOTALL):
        for line in block.splitlines():
            if line.startswith("$ "):
                found.append((line[2:], []))
            else:
                found[-1][1].append(line)
    return [(command, "\n".join(lines).strip()) for command, lines in found]


def run(command, folder):
    """The output of one command of the README, with `wellseq` being this one."""
    shell = f'wellseq() {{ "{sys.executable}" -m wellseq "$@"; }}\n{command}'
    done = subprocess.run(
        ["bash", "-c", shell], cwd=folder, capture_output=True, text=True, timeout=120, check=False
    )
    return (done.stdout + done.stderr).strip()


def unlike(shown, found):
    """Whether an output differs from the one shown, in which `…` stands for any lines."""
    pattern = "".join(
        "(?s:.*)" if line == "…" else re.escape(line) + r"\n?" for line in shown.split("\n")
    )
    return re.fullmatch(pattern, found) is None


def test_every_console_block_shows_what_happens(tmp_path):
    shown = consoles(README)
    assert len(shown) >= 8
    for command, output in shown:
        found = run(command, tmp_path)
        assert not unlike(output, found), f"$ {command}\n{found}"


def test_the_comparison_sees_one_changed_figure():
    assert not unlike("a 12 V\n…\nend", "a 12 V\nmore\nand more\nend")
    assert unlike("a 12 V\n…\nend", "a 13 V\nmore\nend")
    assert unlike("a 12 V", "a 12 V\nmore")


def test_the_python_example_runs():
    (example,) = re.findall(r"```python\n(.*?)```", README, re.DOTALL)
    done = subprocess.run(
        [sys.executable, "-c", example], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr
    assert done.stdout.splitlines()[-1] == "0 findings stand between the night and its table"


@pytest.mark.parametrize("path", re.findall(r"\]\(([^)h][^)]*)\)", README))
def test_every_link_leads_somewhere(path):
    assert (ROOT / path).exists()
