"""Deviations that are known and not yet mended, by the name of the case. They are printed in every run, and so is one that has
gone away. The seeds 148 and 208, whose branches pass each other nearer than f64 tells, are not among those followed."""

#: Where a turn of the answer just touches the band, core and oracle place the jump of a settling time up to about 1e-4 of the knob
#: apart; beside it a margin or a peak at a sharp corner. Which of the two is right is open.
JUMP = "an edge where a figure jumps or has a corner"

DEVIATIONS = {
    "requirements 5": JUMP,
    "requirements 9": JUMP,
    "requirements 20": JUMP,
    "requirements 30": JUMP,
    "requirements 50": JUMP,
    "requirements 53": JUMP,
    "requirements 75": JUMP,
    "requirements 100": JUMP,
    "requirements 107": JUMP,
    "requirements 111": JUMP,
    "requirements 117": JUMP,
    "requirements 120": JUMP,
    "requirements 121": JUMP,
    "requirements 139": JUMP,
    "requirements 152": JUMP,
    "requirements 160": JUMP,
    "requirements 163": JUMP,
    "requirements 172": JUMP,
    "requirements 174": JUMP,
    "requirements 181": JUMP,
    "requirements 188": JUMP,
    "requirements 195": JUMP,
    "requirements 196": JUMP,
}
