"""Schedule and purchase as text for the screen, as CSV and as JSON.

Names of parts are free text: they go through `report.text` wherever a reader or a spreadsheet
program could act on them.  Prices are printed as they add up, with two decimals, and without a
currency, which parts lists do not give.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from decimal import Decimal

from contactlogic.purchase.buy import Purchase
from contactlogic.purchase.cheapest import Cheapest, Offer
from contactlogic.purchase.parts import Contacts, Part, plain
from contactlogic.purchase.schedule import Line, Schedule
from contactlogic.report.columns import fold, in_columns
from contactlogic.report.phrases import NOT_GIVEN
from contactlogic.report.text import csv_text, markdown, one_line, table_lines

__all__ = [
    "OFFERED",
    "SCHEMA",
    "cheapest_text",
    "money",
    "offered",
    "purchase_csv",
    "purchase_json",
    "purchase_markdown",
    "purchase_text",
    "schedule_csv",
    "total_line",
]

SCHEMA = "contactlogic/purchase/1"

OFFERED = ("form", "design", "poles", "busiest relay", "price", "known of the price")
"""Headings of `offered`."""

_AT_LOADS = ("at loads and coils", "number", "for")

_FIGURES = ("poles", "makes", "breaks", "changeovers", "springs")


def money(price: Decimal) -> str:
    """`3.50`."""
    return f"{price:.2f}"


def purchase_text(schedules: Sequence[Schedule], title: str, *, width: int | None) -> str:
    """The schedule and the purchase of each design, for the screen."""
    parts = [_design(schedule, title, width) for schedule in schedules]
    lines = [line for part in parts for line in (*part, "")][:-1]
    return "\n".join(folded for line in lines for folded in fold(line, width)) + "\n"


def _design(schedule: Schedule, title: str, width: int | None) -> list[str]:
    design, purchase = schedule.design, schedule.purchase
    lines = [one_line(f"{design.form} {design.fingerprint} {title}"), ""]
    header = ("relay", *_FIGURES, "spare", "follows", "part")
    rows = [
        [
            line.relay,
            *map(str, _figures(line)),
            _spare(line.spare),
            line.follows or "",
            one_line(line.part.name) if line.part else line.said,
        ]
        for line in schedule.lines
    ]
    kept = [k for k, name in enumerate(header) if name != "follows" or schedule.repeaters]
    lines += in_columns(
        [header[k] for k in kept],
        [[row[k] for k in kept] for row in rows],
        width=width,
        figures=True,
        text=[0, *range(len(_FIGURES) + 1, len(header))],
    )
    if purchase is not None:
        lines += ["", *_purchase(purchase, width)]
    if schedule.fittings:
        lines += ["", *in_columns(_AT_LOADS, _fittings(schedule), width=width)]
    return [*lines, *(f"note: {one_line(note)}" for note in _notes(schedule))]


def _purchase(purchase: Purchase, width: int | None) -> list[str]:
    lines = in_columns(
        ("part", "used", "spares", "bought", "price of one", "price", "in stock"),
        [[one_line(part), *figures] for part, *figures in _items(purchase)],
        width=width,
        figures=True,
    )
    return [
        *(lines if purchase.items else ["nothing to buy"]),
        "",
        total_line(purchase),
        f"coils:  {_coil(purchase)}",
        f"spares: {purchase.spares} per cent of each part, rounded up",
    ]


def _fittings(schedule: Schedule) -> list[tuple[str, ...]]:
    """Parts at loads and coils: what, how many, where."""
    return [(b.text, str(len(b.loads)), ", ".join(b.loads)) for b in schedule.fittings]


def _items(purchase: Purchase) -> list[tuple[str, ...]]:
    return [
        (
            item.part.name,
            *(str(number) for number in (item.used, item.spares, item.bought)),
            money(item.part.price),
            money(item.price),
            NOT_GIVEN if item.part.stock is None else str(item.part.stock),
        )
        for item in purchase.items
    ]


def total_line(purchase: Purchase) -> str:
    """`total:  12.50 (currency not given), proved least for this design and parts list`."""
    known = (
        "proved least for this design and parts list"
        if purchase.proved
        else f"cheapest found; at least {money(purchase.at_least)} is proved"
    )
    return f"total:  {money(purchase.price)} (currency {NOT_GIVEN}), {known}"


def _coil(purchase: Purchase) -> str:
    if purchase.coil is None:
        return NOT_GIVEN
    said = f" ({purchase.said})" if purchase.said else ""
    return f"{purchase.coil.text}{said}"


def _notes(schedule: Schedule) -> list[str]:
    own = schedule.purchase.notes if schedule.purchase else ()
    return [*own, *schedule.moved(), *schedule.notes]


def _figures(line: Line) -> tuple[int, ...]:
    n = line.count
    return n.poles, n.makes, n.breaks, n.changeovers, n.springs


def _spare(spare: Contacts | None) -> str:
    return NOT_GIVEN if spare is None else spare.text or "none"


def offered(found: Cheapest) -> list[tuple[str, ...]]:
    """The design of fewest poles and the cheapest one of each form, side by side."""
    rows = []
    for k, fewest in enumerate(found.fewest):
        best = Offer(found.result.designs[k], found.schedules[k])
        rows.append(_offer("fewest poles found", fewest, found.at_least[k]))
        rows.append(_offer("cheapest found", best, found.at_least[k]))
    return rows


def _offer(said: str, offer: Offer, at_least: Decimal) -> tuple[str, ...]:
    counts = offer.design.network.per_relay()
    busiest = max(counts, key=lambda name: counts[name].poles, default=None)
    most = "none" if busiest is None else f"{busiest} ({counts[busiest].poles})"
    price = "cannot be bought" if offer.price is None else money(offer.price)
    known = f"at least {money(at_least)} for any wiring: proved"
    if offer.price == at_least:
        known = "proved least of all wirings"
    return offer.design.form, said, str(len(offer.design.network.poles)), most, price, known


def cheapest_text(found: Cheapest, *, width: int | None) -> str:
    """The designs of fewest poles beside the cheapest, and why one cannot be bought."""
    lines = in_columns(OFFERED, offered(found), width=width)
    for offer in found.fewest:
        if offer.price is None:
            why = " ".join(offer.why_not.split())
            lines.append(f"note: fewest poles as {offer.design.form}: {one_line(why)}")
    return "\n".join(folded for line in lines for folded in fold(line, width)) + "\n"


def purchase_markdown(schedule: Schedule) -> list[str]:
    """The purchase as a section of the report, without its heading; empty if nothing is asked."""
    purchase = schedule.purchase
    if purchase is None:
        return []
    fittings = [tuple(map(markdown, row)) for row in _fittings(schedule)]
    rows = [
        (
            markdown(line.relay),
            markdown(line.follows or ""),
            markdown(line.part.name) if line.part else line.said,
            line.part.contacts.text if line.part else "",
            _spare(line.spare),
        )
        for line in schedule.lines
    ]
    lines = table_lines(("relay", "follows", "part", "form", "spare"), rows)
    if purchase.items:
        items = [(markdown(part), *figures) for part, *figures in _items(purchase)]
        header = ("part", "used", "spares", "bought", "price of one", "price", "in stock")
        lines += ["", *table_lines(header, items)]
    if fittings:
        lines += ["", *table_lines(_AT_LOADS, fittings)]
    return [
        *lines,
        "",
        f"- {total_line(purchase)}",
        f"- coils: {markdown(_coil(purchase))}",
        *(f"- note: {markdown(note)}" for note in _notes(schedule)),
    ]


def schedule_csv(schedule: Schedule, title: str) -> str:
    """One line for each relay: relay, figures, spare contacts, what it follows, part, design."""
    name = _name(schedule, title)
    return csv_text(
        ("relay", *_FIGURES, "spare", "follows", "part", "design"),
        (
            (
                line.relay,
                *_figures(line),
                "" if line.spare is None else line.spare.text,
                line.follows or "",
                one_line(line.part.name) if line.part else line.said,
                name,
            )
            for line in schedule.lines
        ),
    )


def purchase_csv(schedule: Schedule, title: str) -> str:
    """One line for each part bought, then for each kind at loads and coils, without a price."""
    name = _name(schedule, title)
    items = schedule.purchase.items if schedule.purchase else ()
    return csv_text(
        (
            *("part", "form", "coil", "contact_amps", "used", "spares", "bought"),
            *("price_of_one", "price", "stock", "design"),
        ),
        [
            (
                one_line(item.part.name),
                item.part.contacts.text,
                item.part.coil.text if item.part.coil else "",
                "" if item.part.amps is None else plain(item.part.amps),
                *(item.used, item.spares, item.bought),
                *(money(item.part.price), money(item.price)),
                "" if item.part.stock is None else item.part.stock,
                name,
            )
            for item in items
        ]
        + [
            (b.text, "", "", "", len(b.loads), 0, len(b.loads), "", "", "", name)
            for b in schedule.fittings
        ],
    )


def _name(schedule: Schedule, title: str) -> str:
    return one_line(f"{schedule.design.form} {schedule.design.fingerprint} {title}")


def purchase_json(schedules: Sequence[Schedule], title: str) -> str:
    """Schedules and purchases of all designs, ASCII, prices as text so that none is rounded."""
    data = {
        "schema": SCHEMA,
        "title": title,
        "currency": None,
        "designs": [
            {
                "form": schedule.design.form,
                "fingerprint": schedule.design.fingerprint,
                "repeaters": dict(schedule.repeaters),
                "schedule": [_line_json(schedule, line) for line in schedule.lines],
                "purchase": _purchase_json(schedule.purchase),
                "fittings": [
                    {"part": b.part, "value": b.value, "number": len(b.loads), "for": [*b.loads]}
                    for b in schedule.fittings
                ],
                "notes": _notes(schedule),
            }
            for schedule in schedules
        ],
    }
    return json.dumps(data, indent=1) + "\n"


def _line_json(schedule: Schedule, line: Line) -> dict[str, object]:
    units = schedule.purchase.units if schedule.purchase else ()
    return {
        "relay": line.relay,
        "follows": line.follows,
        **dict(zip(_FIGURES, _figures(line), strict=True)),
        "spare": None if line.spare is None else line.spare.text,
        "part": line.part.name if line.part else None,
        "not_bought": line.said or None,
        "contacts": [
            {"relay": unit.relay, "pole": pole, "contact": at}
            for unit in units
            if unit.name == line.relay
            for pole, at in unit.poles
        ],
    }


def _purchase_json(purchase: Purchase | None) -> dict[str, object] | None:
    if purchase is None:
        return None
    return {
        "coil": purchase.coil.text if purchase.coil else None,
        "spares_percent": purchase.spares,
        "parts": [
            {
                **_part_json(item.part),
                "used": item.used,
                "spares": item.spares,
                "bought": item.bought,
                "price": money(item.price),
            }
            for item in purchase.items
        ],
        "price": money(purchase.price),
        "bound": {"at_least": money(purchase.at_least), "proven_minimum": purchase.proved},
    }


def _part_json(part: Part) -> dict[str, object]:
    return {
        "part": part.name,
        "form": part.contacts.text,
        "coil": part.coil.text if part.coil else None,
        "contact_amps": None if part.amps is None else plain(part.amps),
        "price_of_one": money(part.price),
        "stock": part.stock,
    }
