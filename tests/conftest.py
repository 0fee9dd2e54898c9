"""Options of the test suite: everyday, --whole, --speed."""

import gc
from collections.abc import Iterator

import pytest
from hypothesis import settings

# A busy machine is no failure; and the same examples in every run.
settings.register_profile("rowkeeper", deadline=None, derandomize=True)
settings.load_profile("rowkeeper")


def pytest_addoption(parser: pytest.Parser) -> None:
    parser.addoption("--whole", action="store_true", help="also run whole proofs, whole benches and whole boards")
    parser.addoption("--speed", action="store_true", help="run only the figures measured as ratios")


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    wanted = "speed" if config.getoption("--speed") else None
    for item in items:
        if wanted and wanted not in item.keywords:
            item.add_marker(pytest.mark.skip(reason="only figures were asked for"))
        elif "speed" in item.keywords and not wanted:
            item.add_marker(pytest.mark.skip(reason="a figure, run with --speed"))
        elif "slow" in item.keywords and not config.getoption("--whole"):
            item.add_marker(pytest.mark.skip(reason="slow, run with --whole"))


@pytest.fixture(autouse=True, scope="session")
def _quiet_amaranth() -> None:
    """Amaranth reports an unused elaboratable at garbage collection, once: provoke its state before any test."""
    from amaranth.back import rtlil
    from amaranth.hdl import Module

    rtlil.convert(Module(), ports=[])


@pytest.fixture(autouse=True)
def _collect() -> Iterator[None]:
    """Blame a component that was made and not used on the test that made it."""
    yield
    gc.collect()
