"""One view of a register whose whole chain holds: what an answer to an auditor may rest on."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass

from sheets.errors import NotEstablishedError, Problem
from sheets.register.chain import Anchor, ChainVerdict, chain_in
from sheets.register.opening import Place, open_register
from sheets.register.store import View


@dataclass(frozen=True, kw_only=True)
class Whole:
    """A view, with how far its chain was judged."""

    view: View
    chain: ChainVerdict
    last: Anchor


@contextmanager
def whole_register(register_at: Place, anchors: Sequence[Anchor] = ()) -> Iterator[Whole]:
    """Opens a register to read, and checks every event first; ``anchors`` were kept outside.

    Raises NotEstablishedError where the chain doesn't hold: nothing can be told from it then.
    """
    with open_register(register_at, read_only=True) as register, register.reading() as view:
        chain = chain_in(view, anchors)
        if chain.broken is not None or chain.last is None:
            what = chain.broken.value if chain.broken is not None else "it is empty"
            raise NotEstablishedError(
                Problem(
                    where=f"event {chain.broken_at} of the register",
                    what=f"The chain doesn't hold: {what}. Nothing can be told from this register.",
                    fix="Go back to a backup whose anchor was kept outside, and find out who wrote to it.",
                )
            )
        yield Whole(view=view, chain=chain, last=chain.last)
