"""Golden files: compare with what is kept, or keep anew.

`BLESS=1 pytest tests/sheets` writes them; a person then reads the difference. A blessed test counts as skipped.
"""

import os
from collections.abc import Callable
from pathlib import Path

import pytest

GOLDEN = Path(__file__).parent / "golden"


@pytest.fixture
def golden() -> Callable[[str, str], None]:
    """Compares a text with the golden file of that name, byte for byte."""

    def compare(name: str, actual: str) -> None:
        path = GOLDEN / name
        if os.environ.get("BLESS"):
            path.write_bytes(actual.encode())
            pytest.skip(f"{name} was blessed: read it")
        expected = path.read_bytes().decode()
        assert expected == actual

    return compare
