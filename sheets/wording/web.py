"""Pages for a screen, from the templates of one language. Unlike on paper, every value is escaped."""

from __future__ import annotations

from functools import lru_cache

from jinja2 import Environment, FileSystemLoader, StrictUndefined

from sheets.resources import resource_folder

FOLDER = "desk"


def _shown(value: object) -> object:
    """A value of a page: what would turn or hide the words around it is shown by its number."""
    if not isinstance(value, str) or hasattr(value, "__html__") or value.isprintable():
        return value
    return "".join(
        sign if sign.isprintable() or sign == "\n" else sign.encode("unicode_escape").decode()
        for sign in value
    )


@lru_cache(maxsize=8)
def _environment(language: str) -> Environment:
    return Environment(
        loader=FileSystemLoader(resource_folder("templates") / language / FOLDER),
        undefined=StrictUndefined,
        autoescape=True,
        finalize=_shown,
        trim_blocks=True,
        lstrip_blocks=True,
        auto_reload=False,
    )


def web_page(name: str, values: dict[str, object], *, language: str = "en") -> str:
    """The page of a template with that ``name``; ``language`` as in the machine file."""
    return _environment(language).get_template(f"{name}.html").render(values)


def web_style(language: str = "en") -> str:
    """The style sheet that all pages of a ``language`` share."""
    return (resource_folder("templates") / language / FOLDER / "look.css").read_text(encoding="utf-8")
