"""Colours of the ends, in the order in which they are shown."""

from typing import NamedTuple


class End(NamedTuple):
    """How an end is shown: its column in the outcomes, the colour of its band and of text on it."""

    column: str
    colour: str
    text: str

    @property
    def name(self) -> str:
        """What the end is called where people read."""
        return self.column.replace("_", " ")


LIGHT = "#ffffff"
DARK = "#111111"

# Lightness L* climbs (about 17, 31, 41, 54, 68, 80, 94), so that neighbours stay apart in grey print
# and for every kind of colour vision; hue changes on top of that.
ENDS = (
    End("reabsorbed", "#3b1a4f", LIGHT),
    End("waveguided", "#1d4a7d", LIGHT),
    End("substrate", "#146c69", LIGHT),
    End("cover", "#5f8f3f", DARK),
    End("elsewhere", "#b0a49f", DARK),
    End("free_below", "#f2c14b", DARK),
    End("free_above", "#fbeec0", DARK),
)

ON_WHITE = {end.column: end.colour for end in ENDS} | {
    "trapped": "#2b3070",
    "elsewhere": "#857872",
    "free_below": "#a87800",
    "free_above": "#8d7c3c",
}
"""What shares are drawn in where each has a panel of its own on white: pale colours are darkened, the hue is kept."""
