"""The examples in docstrings are true."""

from __future__ import annotations

import doctest
import importlib
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
WITH_EXAMPLES = [
    f"{path.parent.name}.{path.stem}"
    for floor in ("profiles", "outputs", "fabricate")
    for path in sorted((ROOT / floor).glob("*.py"))
    if ">>> " in path.read_text(encoding="utf-8")
]


@pytest.mark.parametrize("name", WITH_EXAMPLES)
def test_examples(name: str) -> None:
    result = doctest.testmod(importlib.import_module(name))
    assert result.attempted
    assert not result.failed


def test_there_are_examples() -> None:
    assert len(WITH_EXAMPLES) > 10
