"""A drawing surface whose SVG stands inside a page: no fixed colours, no fonts, no names of its own.

Colours are stand-ins, each replaced by a property of the page's style sheet, so that one drawing
serves light, dark and paper. Lines differ by dash as well as by colour.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from contextlib import contextmanager
from io import BytesIO
from typing import TYPE_CHECKING, Any
from xml.etree import ElementTree

from optimizer.quantities import show

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.axis import Axis
    from matplotlib.figure import Figure

WIDTH = 7.2  # inch, drawn 72 points to the inch
SIZE = 9.5

INK, QUIET, RULE, PAPER, LIMIT = "#010101", "#020202", "#030303", "#fefefe", "#040404"
LINES = ("#0a0a01", "#0a0a02", "#0a0a03", "#0a0a04", "#0a0a05")
DASHES = ("solid", (0, (6, 2)), (0, (2, 1.5)), (0, (7, 2, 1.5, 2)), (0, (4, 1.5, 1, 1.5, 1, 1.5)))
PROPERTIES = {
    INK: "--ink",
    QUIET: "--quiet",
    RULE: "--rule",
    PAPER: "--paper",
    LIMIT: "--limit",
    **{stand_in: f"--line-{number}" for number, stand_in in enumerate(LINES, 1)},
}

_SETTINGS: Any = {  # by names that matplotlib's types list
    "svg.fonttype": "none",
    "svg.hashsalt": "luxsift",
    "text.parse_math": False,  # a part name is no formula
    "axes.unicode_minus": True,
    "font.size": SIZE,
    "axes.titlesize": SIZE,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "axes.linewidth": 0.7,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "axes.titlecolor": INK,
    "axes.facecolor": "none",
    "figure.facecolor": "none",
    "text.color": INK,
    "xtick.color": QUIET,
    "ytick.color": QUIET,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "grid.color": RULE,
    "grid.linewidth": 0.6,
    "hatch.color": QUIET,
    "hatch.linewidth": 0.6,
    "legend.frameon": False,
    "legend.handlelength": 3.2,
    "lines.linewidth": 1.6,
}
_DECIMALS = re.compile(r"-?\d+\.\d{3,}")
_REFERENCE = re.compile(r"url\(#([^)]+)\)")
_PLACES = ("d", "x", "y", "width", "height", "transform", "points")


@contextmanager
def settings() -> Iterator[None]:
    """Matplotlib's settings for these drawings, put back afterwards."""
    import matplotlib as mpl

    with mpl.rc_context(_SETTINGS):
        yield


def canvas(height: float, width: float = WIDTH) -> Figure:
    """An empty drawing of `height` [inch]; call it inside `settings`."""
    from matplotlib.backends.backend_svg import FigureCanvasSVG
    from matplotlib.figure import Figure

    figure = Figure(figsize=(width, height), layout="constrained")
    FigureCanvasSVG(figure)
    return figure


def apart(figure: Figure, height: float, width: float = 0.04) -> None:
    """Set panels farther apart: by `height` [inch] below and by `width` beside each other."""
    engine = figure.get_layout_engine()
    if engine is not None:
        engine.set(h_pad=height, w_pad=width)  # type: ignore[call-arg]


def svg(figure: Figure, key: str) -> str:
    """The drawing as an SVG element for HTML, its identifiers led by `key`."""
    buffer = BytesIO()
    figure.savefig(buffer, format="svg", transparent=True, metadata=dict.fromkeys(_METADATA))
    root = ElementTree.fromstring(buffer.getvalue())
    _strip(root)
    used = _used(root)
    for element in root.iter():
        _rename(element, key, used)
    for name in ("width", "height", "version"):
        root.attrib.pop(name, None)
    root.set("aria-hidden", "true")
    root.set("focusable", "false")
    return ElementTree.tostring(root, encoding="unicode", short_empty_elements=True)


def units(axis: Axis, kind: str) -> None:
    """Write the numbers along `axis` as engineering quantities of `kind`."""
    from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

    axis.set_major_formatter(FuncFormatter(lambda value, _place: show(value, kind)))
    if axis.get_scale() == "log":
        axis.set_major_locator(LogLocator(numticks=9))
        axis.set_minor_formatter(NullFormatter())


def grid(axes: Axes, which: str = "both") -> None:
    """Rules behind the data, along `which` axes."""
    axes.set_axisbelow(True)
    axes.grid(True, axis=which)  # type: ignore[arg-type]


_METADATA = ("Date", "Creator", "Format", "Type")


def _strip(root: ElementTree.Element) -> None:
    """Drop name spaces, blank text, metadata and the style that would reach the whole page."""
    for parent in list(root.iter()):
        for child in list(parent):
            if child.tag.rpartition("}")[2] in ("metadata", "style"):
                parent.remove(child)
    for element in root.iter():
        element.tag = element.tag.rpartition("}")[2]
        element.attrib = {name.rpartition("}")[2]: value for name, value in element.attrib.items()}
        element.tail = None
        if element.text is not None and not element.text.strip():
            element.text = None


def _used(root: ElementTree.Element) -> set[str]:
    """The identifiers that something refers to."""
    used = set()
    for element in root.iter():
        for name, value in element.attrib.items():
            used |= set(_REFERENCE.findall(value))
            if name == "href":
                used.add(value.removeprefix("#"))
    return used


def _rename(element: ElementTree.Element, key: str, used: set[str]) -> None:
    """Lead the identifiers by `key` and drop those that nobody uses; name colours, shorten numbers."""
    for name, value in list(element.attrib.items()):
        if name == "id" and value not in used:
            del element.attrib["id"]
        else:
            element.set(name, _renamed(name, value, key))


def _renamed(name: str, value: str, key: str) -> str:
    if name == "id":
        return f"{key}-{value}"
    if name == "href":
        return f"#{key}-{value.removeprefix('#')}"
    if name in _PLACES:
        return " ".join(_DECIMALS.sub(lambda number: f"{float(number[0]):.2f}", value).split())
    value = _REFERENCE.sub(rf"url(#{key}-\1)", value)
    for stand_in, colour in PROPERTIES.items():
        value = value.replace(stand_in, f"var({colour})")
    return "; ".join(rule for rule in value.split("; ") if not rule.startswith("font-family"))
