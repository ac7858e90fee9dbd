"""The command line itself → what a shell needs to complete it: commands, options, choices."""

from __future__ import annotations

import argparse
from collections.abc import Callable
from dataclasses import dataclass

SHELLS = ("bash", "fish", "zsh")


@dataclass(frozen=True, slots=True)
class Option:
    """An option: how it is written, its help, the words it may have, whether it takes any."""

    written: tuple[str, ...]
    says: str
    words: tuple[str, ...]
    takes: bool


@dataclass(frozen=True, slots=True)
class Command:
    """A command: its name, one sentence, its options, the words that its arguments may be."""

    name: str
    says: str
    options: tuple[Option, ...]
    words: tuple[str, ...]


def command_of(name: str, parser: argparse.ArgumentParser, words: tuple[str, ...]) -> Command:
    """A command as its parser has it; `words` are what its arguments may be besides files."""
    options = []
    choices = list(words)
    for action in parser._actions:
        if action.option_strings:
            given = tuple(str(one) for one in action.choices or ())
            takes = action.nargs != 0
            says = (action.help or "").replace("%%", "%")
            options.append(Option(tuple(action.option_strings), says, given, takes))
        else:
            choices += [str(one) for one in action.choices or ()]
    return Command(name, parser.description or "", tuple(options), tuple(choices))


def script(shell: str, commands: list[Command]) -> str:
    """The script for a shell; raises KeyError for one that is not known."""
    return _SCRIPTS[shell](commands)


def _bash(commands: list[Command]) -> str:
    names = " ".join(one.name for one in commands)
    lines = [
        "# completion of wellseq for bash",
        "_wellseq() {",
        '  local word="${COMP_WORDS[COMP_CWORD]}" before="${COMP_WORDS[COMP_CWORD-1]}"',
        "  local options='' words='' values=''",
        "  COMPREPLY=()",
        '  if [ "$COMP_CWORD" -eq 1 ]; then',
        f"    COMPREPLY=($(compgen -W '{names} --help --version' -- \"$word\"))",
        "    return",
        "  fi",
        '  case "${COMP_WORDS[1]}" in',
    ]
    for one in commands:
        written = " ".join(name for option in one.options for name in option.written)
        lines.append(
            f"    {one.name}) options={_single(written)} words={_single(' '.join(one.words))}"
        )
        choices = [option for option in one.options if option.words]
        if choices:
            lines.append('      case "$before" in')
            for option in choices:
                names_ = "|".join(option.written)
                lines.append(f"        {names_}) values={_single(' '.join(option.words))} ;;")
            lines.append("      esac")
        lines.append("      ;;")
    lines += [
        "  esac",
        '  if [ -n "$values" ]; then',
        '    COMPREPLY=($(compgen -W "$values" -- "$word"))',
        '  elif [ "${word#-}" != "$word" ]; then',
        '    COMPREPLY=($(compgen -W "$options" -- "$word"))',
        "  else",
        '    COMPREPLY=($(compgen -W "$words" -- "$word") $(compgen -f -- "$word"))',
        "  fi",
        "}",
        "complete -o filenames -F _wellseq wellseq",
    ]
    return "\n".join(lines) + "\n"


def _zsh(commands: list[Command]) -> str:
    lines = [
        "#compdef wellseq",
        "# completion of wellseq for zsh",
        "_wellseq() {",
        "  local -a commands",
        "  commands=(",
        *(f"    {_single(one.name + ':' + _plain(one.says))}" for one in commands),
        "  )",
        "  if (( CURRENT == 2 )); then",
        "    _describe command commands",
        "    return",
        "  fi",
        '  case "$words[2]" in',
    ]
    for one in commands:
        lines += [f"    {one.name})", "      shift words; (( CURRENT-- ))", "      _arguments \\"]
        for option in one.options:
            for written in option.written:
                lines.append(f"        {_single(_zsh_option(option, written))} \\")
        rest = f"*:word:({' '.join(one.words)})" if one.words else "*:file:_files"
        lines += [f"        {_single(rest)}", "      ;;"]
    lines += ["  esac", "}", "compdef _wellseq wellseq"]
    return "\n".join(lines) + "\n"


def _zsh_option(option: Option, written: str) -> str:
    says = _plain(option.says).replace("[", "(").replace("]", ")")
    if not option.takes:
        return f"{written}[{says}]"
    values = f"({' '.join(option.words)})" if option.words else "_files"
    return f"{written}[{says}]:value:{values}"


def _fish(commands: list[Command]) -> str:
    lines = ["# completion of wellseq for fish"]
    for one in commands:
        at_start = "-n __fish_use_subcommand"
        lines.append(
            f"complete -c wellseq {at_start} -f -a {one.name} -d {_single(_plain(one.says))}"
        )
    for one in commands:
        here = f"-n '__fish_seen_subcommand_from {one.name}'"
        for option in one.options:
            names = " ".join(
                f"-l {name[2:]}" if name.startswith("--") else f"-s {name[1:]}"
                for name in option.written
            )
            values = f" -x -a {_single(' '.join(option.words))}" if option.words else ""
            takes = " -r" if option.takes and not option.words else ""
            says = _single(_plain(option.says))
            lines.append(f"complete -c wellseq {here} {names}{takes}{values} -d {says}")
        if one.words:
            lines.append(f"complete -c wellseq {here} -a {_single(' '.join(one.words))}")
    return "\n".join(lines) + "\n"


def _plain(text: str) -> str:
    """The first line of a text, without signs that shells act on inside a description."""
    first = text.strip().split("\n")[0]
    return first.replace(":", ";").replace("`", "").replace("$", "")


def _single(text: str) -> str:
    """A text in single quotes, as all three shells read it."""
    return "'" + text.replace("'", "’") + "'"


_SCRIPTS: dict[str, Callable[[list[Command]], str]] = {"bash": _bash, "fish": _fish, "zsh": _zsh}
