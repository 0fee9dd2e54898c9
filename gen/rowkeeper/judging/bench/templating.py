"""The templates of the bench, strict: a name that is not given is our own bug, never an empty text."""

from functools import cache
from pathlib import Path

from jinja2 import Environment, FileSystemLoader, StrictUndefined

__all__ = ["fill_in"]


@cache
def _templates() -> Environment:
    folder = FileSystemLoader(Path(__file__).parent / "templates")
    return Environment(loader=folder, undefined=StrictUndefined, autoescape=False, keep_trailing_newline=True)


def fill_in(template: str, **values: object) -> str:
    """The text of one template with these values."""
    return _templates().get_template(template).render(**values)
