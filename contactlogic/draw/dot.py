"""A sheet as text for a renderer of the DOT language, everything at a fixed position.

Pure text.  Every line is an edge between two point nodes whose ends are not clipped, every text a
plain node, so that nothing is left to a layout engine (`neato -n2`).  The same sheet gives the
same bytes.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from contactlogic.draw.sheet import BLACK, Circle, Line, Point, Sheet, Text, plain

__all__ = ["directed_text", "dot_text", "number"]


def dot_text(sheet: Sheet) -> str:
    """The sheet in the DOT language."""
    import graphviz

    graph = graphviz.Graph(
        "drawing",
        comment=_comment(sheet.title),
        graph_attr={"outputorder": "edgesfirst", "splines": "line", "pad": "0", "bgcolor": "white"},
        node_attr={
            "shape": "point",
            "style": "invis",
            "width": "0",
            "height": "0",
            "margin": "0",
            "label": "",
            "fontname": "Helvetica",
        },
        edge_attr={"headclip": "false", "tailclip": "false"},
    )
    ids: dict[Point, str] = {}

    def place(point: Point) -> str:
        return f"{number(point[0])},{number(sheet.height - point[1])}"

    def node(point: Point) -> str:
        at = (round(point[0], 2), round(point[1], 2))
        if at not in ids:
            ids[at] = f"p{len(ids) + 1}"
            graph.node(ids[at], pos=place(at))
        return ids[at]

    node((0.0, 0.0))
    node((sheet.width, sheet.height))
    for line in sheet.lines:
        graph.edge(node(line.start), node(line.end), **_line_style(line))
    for i, circle in enumerate(sheet.circles, start=1):
        graph.node(f"c{i}", pos=place(circle.centre), **_circle_style(circle))
    for i, text in enumerate(sheet.texts, start=1):
        graph.node(f"t{i}", pos=place(text.at), **_text_style(text))
    return str(graph.source)


def directed_text(
    title: str,
    nodes: Sequence[tuple[str, Mapping[str, str]]],
    arrows: Sequence[tuple[str, str, Mapping[str, str]]],
) -> str:
    """A graph of named nodes and arrows, all with fixed positions, in the DOT language.

    Args:
        nodes: name and attributes; `label` is plain text, line breaks kept, and begins at the
            left edge where `labeljust` is "l".
        arrows: from, to and attributes.
    """
    import graphviz

    graph = graphviz.Digraph(
        "states",
        comment=_comment(title),
        graph_attr={"outputorder": "edgesfirst", "pad": "0", "bgcolor": "white"},
        node_attr={"fontname": "Helvetica", "margin": "0", "fixedsize": "true"},
        edge_attr={"fontname": "Helvetica", "fontsize": "7", "arrowsize": "0.6"},
    )
    for name, style in nodes:
        graph.node(name, **_labelled(style))
    for tail, head, style in arrows:
        graph.edge(tail, head, **_labelled(style))
    return str(graph.source)


def _labelled(style: Mapping[str, str]) -> dict[str, str]:
    attributes = dict(style)
    if "label" in attributes:
        attributes["label"] = _plain_label(attributes["label"])
        if attributes.pop("labeljust", "") == "l":
            attributes["label"] += "\\l"
    return attributes


def _plain_label(text: str) -> str:
    """Text that the DOT language shows as it stands."""
    import graphviz

    # DOT labels read character entities, so an ampersand of the user's must be written as one
    lines = text.replace("&", "&amp;").split("\n")
    return "\\n".join(graphviz.escape(line) for line in lines)


def number(value: float) -> str:
    """A length as drawings write it: at most two decimals."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _comment(title: str) -> str:
    return plain(title) or "drawing"


def _line_style(line: Line) -> dict[str, str]:
    style = {"class": line.kind, "penwidth": number(line.weight)}
    if line.colour != BLACK:
        style["color"] = line.colour
    return style


def _circle_style(circle: Circle) -> dict[str, str]:
    inches = f"{2 * circle.radius / 72:.4f}"
    style = {"shape": "circle", "fixedsize": "true", "width": inches, "height": inches}
    style["style"] = "filled" if circle.filled else "solid"
    if circle.filled:
        style["fillcolor"] = "black"
    else:
        style["penwidth"] = "1.2"
    return style


def _text_style(text: Text) -> dict[str, str]:
    style = {
        "shape": "plain",
        "style": "solid",
        "label": _plain_label(text.text),
        "fontsize": number(text.size),
    }
    if text.bold:
        style["fontname"] = "Helvetica-Bold"
    elif text.slant:
        style["fontname"] = "Helvetica-Oblique"
    if text.colour != BLACK:
        style["fontcolor"] = text.colour
    return style
