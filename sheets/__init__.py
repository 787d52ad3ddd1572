"""Jamnut: setting procedures and lockout sheets for hydraulic power units."""

from typing import Final

__version__ = "0.1.0"

ENGINE: Final = 1
"""Raised by hand whenever the same machine file may give other content. Printed content names it."""
