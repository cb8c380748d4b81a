"""How every picture looks: size, ink, and series that differ by line and marker as well as by colour."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

if TYPE_CHECKING:
    from matplotlib.axes import Axes

INK: Final = "#1c2a33"
FAINT: Final = "#d5dcdf"
MM_PER_INCH: Final = 25.4
TEXT_pt: Final = 9.0


@dataclass(frozen=True, slots=True)
class Look:
    """One series: its colours also differ in lightness, so that a grey print keeps them apart."""

    colour: str
    line: str  # matplotlib line style
    marker: str


DEEP: Final = Look("#123f5e", "-", "o")
AMBER: Final = Look("#d1811f", "--", "^")
MOSS: Final = Look("#6c9a3f", "-.", "s")
PLUM: Final = Look("#7b3568", ":", "v")
ALARM: Final = Look("#b3261e", "--", "X")
SHADE: Final = "#bcd0dc"
SERIES: Final = (DEEP, AMBER, MOSS, PLUM)


def new_figure(width_mm: float = 115.0, height_mm: float = 72.0, *, left_mm: float = 15.0) -> Figure:
    """Return an empty figure that needs no screen; any other matplotlib figure serves the plots as well.

    Args:
        width_mm: of the whole.
        height_mm: of the whole.
        left_mm: room for names and figures left of the axes.
    """
    figure = Figure(figsize=(width_mm / MM_PER_INCH, height_mm / MM_PER_INCH))
    figure.subplots_adjust(
        left=left_mm / width_mm, right=1.0 - 4.0 / width_mm, bottom=12.0 / height_mm, top=1.0 - 7.0 / height_mm
    )
    FigureCanvasAgg(figure)
    return figure


def dress(axes: Axes, x_label: str, y_label: str, *, grid: str = "both") -> None:
    """Give axes the common look.

    Args:
        axes: what to dress.
        x_label: with its unit.
        y_label: with its unit.
        grid: both, x, y.
    """
    axes.set_xlabel(x_label, fontsize=TEXT_pt, color=INK)
    axes.set_ylabel(y_label, fontsize=TEXT_pt, color=INK)
    axes.tick_params(labelsize=TEXT_pt - 1.0, colors=INK, length=3.0)
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(INK)
        axes.spines[side].set_linewidth(0.7)
    axes.grid(visible=True, axis="x" if grid == "x" else "y" if grid == "y" else "both", color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)


def legend(axes: Axes, *, columns: int = 3) -> None:
    """Put the legend above the axes, where it hides nothing; none where nothing has a name."""
    if not axes.get_legend_handles_labels()[0]:
        return
    axes.legend(
        loc="lower left",
        bbox_to_anchor=(0.0, 1.0),
        ncols=columns,
        frameon=False,
        fontsize=TEXT_pt - 1.0,
        handlelength=2.2,
        columnspacing=1.2,
        borderaxespad=0.2,
        labelcolor=INK,
    )


def empty(axes: Axes, words: str) -> None:
    """Say in the picture that there is nothing to draw, and why."""
    axes.text(0.5, 0.5, words, ha="center", va="center", transform=axes.transAxes, fontsize=TEXT_pt, color=INK)
