"""Sentences from the templates of one language; compiled once."""

from __future__ import annotations

from functools import lru_cache
from typing import Any

from jinja2 import Environment, FileSystemLoader, StrictUndefined, Template

from sheets.resources import resource_folder


@lru_cache(maxsize=8)
def _environment(language: str) -> Environment:
    # Pages draw text literally, so nothing is escaped: a '<' in a name is a '<' on paper.
    return Environment(
        loader=FileSystemLoader(resource_folder("templates") / language),
        undefined=StrictUndefined,
        autoescape=False,
        trim_blocks=True,
        lstrip_blocks=True,
    )


@lru_cache(maxsize=32)
def _module(language: str, file: str) -> Any:  # a template module has whatever macros its file defines
    template: Template = _environment(language).get_template(file)
    return template.module


class Sentences:
    """Macros of one template file, called by name with text arguments."""

    def __init__(self, language: str, file: str) -> None:
        self._module = _module(language, file)

    def has(self, name: str) -> bool:
        return hasattr(self._module, name)

    def arguments(self, name: str) -> tuple[str, ...]:
        """Names that a macro takes."""
        return tuple(getattr(self._module, name).arguments)

    def say(self, sentence: str, /, **values: str) -> str:
        """One sentence. Values that the macro doesn't take are left out; missing ones are empty text.

        Raises AttributeError for a macro that the language doesn't have: a bug, held by a test.
        """
        macro = getattr(self._module, sentence)
        taken = {argument: values.get(argument, "") for argument in macro.arguments}
        return str(macro(**taken)).strip()
