"""Templates of the pages: every text of a book that they are given is escaped, and none may be missing."""

from functools import cache
from importlib.resources import files

import jinja2

__all__ = ["asset", "template"]


@cache
def _environment() -> jinja2.Environment:
    return jinja2.Environment(
        loader=jinja2.PackageLoader("fieldfit.report", "."),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def template(name: str) -> jinja2.Template:
    """A page's template by the name of its file."""
    return _environment().get_template(name)


def asset(name: str) -> str:
    """A style or script that goes into a page as it is."""
    return files("fieldfit.report").joinpath(name).read_text(encoding="utf-8")
