"""The rules about docstrings: everything public has one, and where numbers go in it says units."""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator
from pathlib import Path

from rules import Offences, python_files, tree_of

UNITS = {
    "V": r"V|volts?|mV|kV",
    "s": r"s|seconds?|ms|us",
    "m": r"m|metres?|mm",
    "Hz": r"Hz|hertz|kHz|MHz",
    "K": r"K|kelvin",
    "eV": r"eV|electronvolts?",
    "T": r"T|tesla",
    "F": r"F|farads?|pF|nF",
    "J": r"J|joules?",
    "deg": r"deg|degrees?|°",
    "A": r"A|amperes?",
    "C": r"C|coulombs?",
    "kg": r"kg|kilograms?",
    "u": r"u|atomic mass units?",
    "e": r"e|elementary charges?",
}
"""Last part of a name → the words by which a docstring may say that unit."""
Functions = Iterator[tuple[ast.FunctionDef | ast.AsyncFunctionDef, list[str]]]


def undocumented(package: Path) -> Offences:
    """Public modules, classes, functions and methods without a docstring."""
    for path in python_files(package):
        tree = tree_of(path)
        if tree.body and not ast.get_docstring(tree):
            yield f"{path} has no docstring"
        for node in public(tree):
            if not ast.get_docstring(node):
                yield f"{path}:{node.lineno}: {node.name} has no docstring"


def unitless(package: Path) -> Offences:
    """Public functions whose names or arguments bear a unit that no docstring around them says."""
    for path in python_files(package):
        tree = tree_of(path)
        for function, said in functions(tree, [ast.get_docstring(tree) or ""]):
            for unit in sorted(units_of(function)):
                pattern = rf"(?<![A-Za-z_])(?:{UNITS[unit]})(?![A-Za-z_])"
                if not any(re.search(pattern, text) for text in said):
                    yield f"{path}:{function.lineno}: {function.name} does not say '{unit}'"


def public(node: ast.AST) -> Iterator[ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef]:
    """Public classes and functions of a module, and public methods of its public classes."""
    for child in ast.iter_child_nodes(node):
        if isinstance(child, ast.If | ast.Try):
            yield from public(child)
        if not isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef):
            continue
        if not child.name.startswith("_"):
            yield child
            if isinstance(child, ast.ClassDef):
                yield from public(child)


def functions(node: ast.AST, said: list[str]) -> Functions:
    """Public functions with the docstrings of themselves and of all around them."""
    for child in ast.iter_child_nodes(node):
        if isinstance(child, ast.ClassDef) and not child.name.startswith("_"):
            yield from functions(child, [*said, ast.get_docstring(child) or ""])
        is_function = isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef)
        if is_function and not child.name.startswith("_"):
            yield child, [*said, ast.get_docstring(child) or ""]


def units_of(function: ast.FunctionDef | ast.AsyncFunctionDef) -> set[str]:
    """The units at the ends of a function's name and of its arguments' names."""
    arguments = function.args
    every = [*arguments.posonlyargs, *arguments.args, *arguments.kwonlyargs]
    names = [function.name, *(argument.arg for argument in every)]
    return {unit for name in names if (unit := _unit_at_end(name))}


def _unit_at_end(name: str) -> str:
    """`V` for depth_V, `V` for slope_V_per_s; empty for a name without a unit."""
    words = name.split("_")
    for word in words[1:]:
        if word in UNITS:
            return word
    return ""
