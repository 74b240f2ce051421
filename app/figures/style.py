"""Type sizes and line widths of one kind of output, in the units of its sheet."""

from __future__ import annotations

from dataclasses import dataclass, replace


@dataclass(frozen=True)
class Style:
    """Sizes of one output, in points for a file and in logical pixels on a screen.

    Parameters
    ----------
    base : float
        Type of rows, values and axes.
    floor : float
        The smallest type that is still read; nothing is set smaller.
    title, small, caption : float
        Type of the headline, of remarks, and of the small print.
    margin : float
        Blank border.
    hairline, outline, curve : float
        Widths of grid lines, of the edges of areas, and of curves.
    keep_caption : bool
        A file must carry its small print; on a screen it is the first thing to go.
    """

    base: float
    floor: float
    title: float
    small: float
    caption: float
    margin: float
    hairline: float
    outline: float
    curve: float
    keep_caption: bool = True

    def scaled(self, factor: float) -> Style:
        """The same style with its type scaled, never below the floor."""

        def size(value: float) -> float:
            return max(self.floor, value * factor)

        return replace(
            self,
            base=size(self.base),
            title=size(self.title),
            small=size(self.small),
            caption=size(self.caption),
        )


def screen_style(width: float, height: float) -> Style:
    """Choose the type for a widget, growing slowly with its size.

    Parameters
    ----------
    width, height : float
        Size of the widget [logical px].

    Returns
    -------
    Style
        Whole pixels, so that the type is crisp.
    """
    base = max(11, min(15, round(7.5 + min(width / 180, height / 120))))
    return Style(
        base=base,
        floor=9,
        title=base + 3,
        small=base - 1,
        caption=max(9, base - 2),
        margin=max(8.0, base * 0.9),
        hairline=1.0,
        outline=1.0,
        curve=1.8,
        keep_caption=False,
    )
