"""The cautions that close every report."""

from __future__ import annotations

__all__ = ["CAUTIONS"]

CAUTIONS = (
    "contactlogic checks logic. It does not check ratings, insulation, fusing, suppression of "
    "coil and load, protective bonding or functional safety.",
    "Capacitors stay charged after switching off. Discharge them and measure before touching.",
    "Emergency stops and guards need certified parts and a competent person. Do not build them "
    "from this report.",
    "Contacts are taken as moving at once. A real changeover opens before it closes, and relays "
    "do not move together: a load may drop out or flash for milliseconds.",
    "Local codes and licensed practice decide what may be built and who may build it.",
)
"""One sentence or two each, in the order printed."""
