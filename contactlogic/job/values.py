"""Values of capacitors, resistors and fuses: written by hand, checked, and shown in one manner.

Decimal values with a prefix and a unit (470 uF, 0.5 A) and codes of IEC 60062 (4u7, 100R, 4k7) are
read; the fuse's characteristic (IEC 60127: FF, F, M, T, TT) may stand before its current.
"""

from __future__ import annotations

import re

__all__ = ["amperes", "farads", "ohms"]

_CODE = re.compile(r"[0-9]+[pnumRrKkMG][0-9]+[A-Za-z]*|[0-9]+[Rr]")
_PLAIN = re.compile(r"([0-9]+(?:[.,][0-9]+)?)\s*([pnumkKMG]?)\s*([A-Za-z]*)")
_UNITS = {"f": "F", "farad": "F", "ohm": "ohm", "ohms": "ohm", "r": "ohm", "a": "A", "amp": "A"}


def farads(text: str) -> str:
    """A capacitance as it is shown, `470 uF`.

    Raises:
        ValueError: the text is none, or out of any range met on a panel.
    """
    return _value(text, "F", 1e-12, 10, needs_prefix=True)


def ohms(text: str) -> str:
    """A resistance as it is shown, `100 ohm`.

    Raises:
        ValueError: as for `farads`.
    """
    return _value(text, "ohm", 1e-3, 1e9)


def amperes(text: str) -> str:
    """The rating of a fuse as it is shown, `2 A` or `T 500 mA`.

    Raises:
        ValueError: as for `farads`.
    """
    found = re.fullmatch(r"(FF|TT|F|M|T)?\s*([0-9].*)", text.strip())
    if found is None:
        raise ValueError("no current")
    shown = _value(found[2], "A", 1e-3, 1e3)
    return f"{found[1]} {shown}" if found[1] else shown


def _value(text: str, unit: str, least: float, most: float, *, needs_prefix: bool = False) -> str:
    from quantiphy import QuantiPhyError, Quantity
    from rkm_codes import from_rkm

    plain = re.sub("[\u00b5\u03bc]", "u", re.sub("[\u2126\u03a9]", "ohm", text.strip()))
    code = _CODE.fullmatch(plain)
    found = _PLAIN.fullmatch(plain)
    try:
        if code is not None:
            quantity = from_rkm(plain)
            if quantity is None:
                raise ValueError("no value")
            written = quantity.units
            number = float(quantity)
            shown = Quantity(number, units=unit).render(prec=6)
        elif found is not None:
            amount, prefix, written = found[1].replace(",", "."), found[2], found[3]
            if needs_prefix and not prefix and not written:
                raise ValueError("no unit")
            number = float(Quantity(amount + prefix.replace("K", "k"), units=unit))
            shown = f"{amount} {prefix.replace('K', 'k')}{unit}"
        else:
            raise ValueError("no value")
    except QuantiPhyError as error:
        raise ValueError(str(error)) from None
    if written and _UNITS.get(written.lower()) != unit:
        raise ValueError(f"{written} is no unit for it")
    if not least <= number <= most:
        raise ValueError("out of range")
    return shown
