"""Plain words for colours: a convention of this project, drawn on CIELAB."""

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.colour.cielab import lch

BLACK_BELOW, WHITE_ABOVE = 8.0, 92.0  # lightness of a grey
GREY_BELOW, TINTED_BELOW = 5.0, 12.0  # chroma

# Upper end of each hue range in degrees; the first word is for colours of middle lightness and up, the second for dark ones.
HUES = (
    (18.0, "pink", "crimson"), (45.0, "red", "red"), (72.0, "orange", "brown"), (102.0, "yellow", "olive"),
    (128.0, "yellow-green", "olive green"), (172.0, "green", "green"), (222.0, "blue-green", "blue-green"),
    (284.0, "blue", "blue"), (312.0, "violet", "violet"), (346.0, "purple", "purple"), (360.0, "pink", "crimson"),
)  # fmt: skip
DARK_WORD_BELOW = 50.0  # lightness where the second word takes over
TINTS = ((45.0, "reddish"), (102.0, "yellowish"), (200.0, "greenish"), (284.0, "bluish"), (346.0, "purplish"), (360.0, "reddish"))
LIGHTNESS = ((25.0, "very dark "), (45.0, "dark "), (72.0, ""), (1e9, "light "))
GREY_LIGHTNESS = ((25.0, "very dark "), (45.0, "dark "), (70.0, ""), (1e9, "light "))


def colour_name(colour: FloatArray) -> str:
    """Plain words for one colour L*, a*, b* (3,).

    Notes
    -----
    Our own ranges of lightness L, chroma C and hue angle h; words of eyes differ, so a name is a help to talk, no measurement.

    ==================  =================================================================================
    C below 5           black (L < 8), very dark grey (< 25), dark grey (< 45), grey (< 70), light grey, white (L > 92)
    C 5 to 12           the same greys with a tint ("light bluish grey"): reddish (h 346 to 45), yellowish (to 102), greenish
                        (to 200), bluish (to 284), purplish (to 346)
    C above 12          "very dark" (L < 25), "dark" (< 45), none (< 72), "light"; then the hue:
    h 346 to 18         pink, or crimson where L < 50
    h 18 to 45          red
    h 45 to 72          orange, or brown where L < 50
    h 72 to 102         yellow, or olive where L < 50
    h 102 to 128        yellow-green, or olive green where L < 50
    h 128 to 172        green
    h 172 to 222        blue-green
    h 222 to 284        blue
    h 284 to 312        violet
    h 312 to 346        purple
    ==================  =================================================================================
    """
    lightness, chroma, hue_deg = (float(part) for part in lch(np.asarray(colour, dtype=float)))
    if chroma < GREY_BELOW:
        return _grey(lightness)
    if chroma < TINTED_BELOW:
        return f"{_step(lightness, GREY_LIGHTNESS)}{_step(hue_deg, TINTS)} grey"
    usual, dark = next((usual, dark) for end, usual, dark in HUES if hue_deg < end)
    return f"{_step(lightness, LIGHTNESS)}{dark if lightness < DARK_WORD_BELOW else usual}"


def _grey(lightness: float) -> str:
    if lightness < BLACK_BELOW:
        return "black"
    return "white" if lightness > WHITE_ABOVE else f"{_step(lightness, GREY_LIGHTNESS)}grey"


def _step(value: float, steps: tuple[tuple[float, str], ...]) -> str:
    return next(word for end, word in steps if value < end)
