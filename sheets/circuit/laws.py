"""The families of elements, each with its law."""

from sheets.circuit.actuators import Actuators
from sheets.circuit.cavity import void_flow
from sheets.circuit.pumps import Pumps
from sheets.circuit.reliefs import Reliefs
from sheets.circuit.ways import Checks, Ways

__all__ = ["Actuators", "Checks", "Pumps", "Reliefs", "Ways", "void_flow"]
