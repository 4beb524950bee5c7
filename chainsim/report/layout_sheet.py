"""The paper of a drawing: its scale, its borders, and where places of the lift come to lie."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

SCALES = (5, 2, 1, 1 / 2, 1 / 2.5, 1 / 5, 1 / 10, 1 / 20, 1 / 25, 1 / 50, 1 / 100)
"""Scales to choose from, paper over lift (dimensionless); usual ones of technical drawing."""

ROOM = (110.0, 210.0)
"""Greatest width and height of the picture on the paper [mm]: a sheet of A4 with its notes."""

BORDER = 8.0
"""Paper round everything [mm]."""

MOST_MEASURES = 3
"""Measures along one axis (dimensionless)."""

MEASURES = 22.0
"""Room on the left for the measures of height [mm]."""

BELOW = 18.0
"""Room below the picture for measures across and for what hangs [mm]."""

BESIDE = 68.0
"""Room on the right for notes [mm]."""

TEXT = 2.6
"""Height of the letters [mm]."""

LINE = 4.0
"""From one line of text to the next [mm]."""


class Sheet(NamedTuple):
    """How places of the lift come to lie on the paper.

    Attributes
    ----------
    scale : float
        Paper over lift (dimensionless).
    low, high : ndarray, shape (2,)
        Corners of the box that holds everything drawn [m].
    mirrored : bool
        Whether it is seen from the back.
    noted : float
        Height that all notes take [mm].
    """

    scale: float
    low: np.ndarray
    high: np.ndarray
    mirrored: bool
    noted: float

    @property
    def picture(self) -> np.ndarray:
        """Size of the picture [mm], shape (2,)."""
        return 1e3 * self.scale * (self.high - self.low)

    @property
    def size(self) -> tuple[float, float]:
        """Width and height of the paper [mm]."""
        width, height = self.picture
        return (
            max(MEASURES + width + BESIDE, 150.0) + 2.0 * BORDER,
            max(height + BELOW, self.noted) + 5.0 * LINE + 2.0 * BORDER,
        )

    def place(self, points: np.ndarray) -> np.ndarray:
        """Return where places of the lift come to lie on the paper.

        Parameters
        ----------
        points : ndarray, shape (..., 2)
            In the frame [m].

        Returns
        -------
        ndarray, shape (..., 2)
            On the paper, y downward [mm].
        """
        across = points[..., 0] - self.low[0]
        if self.mirrored:
            across = self.high[0] - points[..., 0]
        down = self.high[1] - points[..., 1]
        on_paper = 1e3 * self.scale * np.stack([across, down], axis=-1)
        return on_paper + [BORDER + MEASURES, BORDER + 2.0 * LINE]


def fitting_scale(span: np.ndarray) -> float:
    """Choose the largest usual scale at which a lift fits the paper.

    Parameters
    ----------
    span : ndarray, shape (2,)
        Width and height of everything drawn [m].

    Returns
    -------
    float
        Paper over lift (dimensionless).
    """
    for scale in SCALES:
        if (1e3 * scale * span <= ROOM).all():
            return scale
    return SCALES[-1]


def scale_text(scale: float) -> str:
    """Write a scale as drawings do.

    Parameters
    ----------
    scale : float
        Paper over lift (dimensionless).

    Returns
    -------
    str
        Such as `1:2.5` or `2:1`.
    """
    return f"{scale:g}:1" if scale > 1.0 else f"1:{1.0 / scale:g}"
