"""Whether a relief valve can be cut off from the pump that it guards."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from sheets.amounts import Finding, Severity
from sheets.circuit.model import Circuit
from sheets.circuit.reach import joined_at_rest
from sheets.machine.model import Machine
from sheets.machine.parts import HandValve


def reliefs_cut_off(
    machine: Machine, circuit: Circuit, *, pump: str, reliefs: Iterable[str], controlled: bool
) -> Iterator[Finding]:
    """Each hand valve that parts a pump from all its reliefs when somebody closes it.

    ``reliefs``: those on its line at rest; ``controlled``: whether a control of its own limits the pump too.
    Then it is a warning: with that control stuck nothing would limit the pressure. Without one it is refused:
    one wrong turn bursts the line, and a lock or a signature on the valve is no protection.
    """
    outlet = circuit.node_of[f"{pump}.P"]
    ports = {circuit.node_of.get(f"{relief}.P") for relief in reliefs}
    if not ports:
        return
    for id_, part in machine.parts.items():
        if not isinstance(part, HandValve) or part.rest == "closed":
            continue
        if ports.isdisjoint(joined_at_rest(machine, circuit, outlet, shut=id_)):
            data = {"pump": pump, "reliefs": ", ".join(sorted(reliefs))}
            if controlled:
                yield Finding(code="control_left_alone", severity=Severity.WARNING, subject=id_, data=data)
            else:
                yield Finding(code="relief_shut_off", severity=Severity.REFUSED, subject=id_, data=data)
