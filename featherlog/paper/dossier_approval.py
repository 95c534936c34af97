"""The first words of the dossier: which content is signed, by whom, and what is warned of."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from featherlog.paper import style
from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.layout import space
from featherlog.paper.style import display, grid, para, shares
from featherlog.words import MEANING

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable, Table

    from featherlog.views.solution import Signature, SolutionView

_CODE = 16
_GROUP = 4
_SIGN_PT = 24.0
_BOX = ("BOX", (0, 0), (-1, -1), style.HEAVY_PT, "black")


def code_of(view: SolutionView) -> str:
    """Return the first sixteen characters of the content hash in groups of four."""
    code = view.content_hash[:_CODE]
    return " ".join(code[at : at + _GROUP] for at in range(0, len(code), _GROUP))


def approval(view: SolutionView, width: float) -> list[Flowable]:
    """Return the content that approval refers to, the signatures and a returned reason."""
    if not view.content_hash:
        words = "This design was only solved. It is not stored, and there is nothing to sign yet."
        return [para(safe(words), style.LEAD)]
    lead = "Approval refers to this content; compare it with the screen before signing:"
    body: list[Flowable] = [
        para(safe(lead)),
        space(2),
        para(safe(code_of(view)), display(20)),
        space(2),
        para(join(" ", [safe("in full"), safe(view.content_hash)]), style.SMALL),
        space(4),
        _signatures(view.signatures, width),
    ]
    if view.returned_reason:
        returned = para(join(" ", [strong("RETURNED:"), safe(view.returned_reason)]))
        body += [space(4), grid([[returned]], [width], _BOX, padding=(6, 4))]
    return body


def _signatures(signatures: Sequence[Signature], width: float) -> Table:
    heads = ("Act", "Name", "Date and time", "Meaning", "Signature")
    rows: list[list[Any]] = [[para(safe(head), style.SMALL) for head in heads]]
    rows += [_signature(signature) for signature in signatures]
    return grid(
        rows,
        shares(width, 14, 24, 30, 36, 30),
        ("LINEBELOW", (0, 0), (-1, -1), style.HAIR_PT, "black"),
        padding=(2, 2.5),
    )


def _signature(signature: Signature) -> list[Any]:
    meaning = para(safe(MEANING.get(signature.act, "")))
    if not signature.name:
        return [para(strong(signature.act)), para(strong("open")), "", meaning, space(_SIGN_PT)]
    return [
        para(strong(signature.act)),
        para(safe(signature.name)),
        para(safe(signature.at)),
        meaning,
        para(safe("recorded in the ledger"), style.SMALL),
    ]


def warning_box(warnings: Sequence[str], width: float) -> Table:
    """Return every warning in full, in the heavy box that is read before all else."""
    title = f"WARNINGS: {len(warnings)}" if warnings else "WARNINGS: none"
    rows: list[list[Any]] = [[para(safe(title), style.LEAD), ""]]
    rows += [
        [para(strong(f"{number}.")), para(safe(f"{warning}."))]
        for number, warning in enumerate(warnings, start=1)
    ]
    return grid(
        rows,
        [22, width - 22],
        _BOX,
        ("SPAN", (0, 0), (-1, 0)),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        padding=(6, 2.5),
    )
