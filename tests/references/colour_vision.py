"""Colours as others see them, for the tests of the palette.

Matrices of full protanopia, deuteranopia and tritanopia, on linear RGB: Machado, Oliveira and
Fernandes (2009), "A Physiologically-based Model for Simulation of Color Vision Deficiency", IEEE
Transactions on Visualization and Computer Graphics 15(6), table of severity 1.0, as carried by the
open-source package colorspacious 1.1.2. Distances: OKLab, Ottosson (2020), times 100. Contrast and
relative luminance: WCAG 2.2.
"""

import numpy as np

VISIONS = {
    "usual": np.eye(3),
    "protanopia": np.array(
        [
            [0.152286, 1.052583, -0.204868],
            [0.114503, 0.786281, 0.099216],
            [-0.003882, -0.048116, 1.051998],
        ]
    ),
    "deuteranopia": np.array(
        [
            [0.367322, 0.860646, -0.227968],
            [0.280085, 0.672501, 0.047413],
            [-0.011820, 0.042940, 0.968881],
        ]
    ),
    "tritanopia": np.array(
        [
            [1.255528, -0.076749, -0.178779],
            [-0.078411, 0.930809, 0.147602],
            [0.004733, 0.691367, 0.303900],
        ]
    ),
}
_LMS = np.array(
    [
        [0.4122214708, 0.5363325363, 0.0514459929],
        [0.2119034982, 0.6806995451, 0.1073969566],
        [0.0883024619, 0.2817188376, 0.6299787005],
    ]
)
_LAB = np.array(
    [
        [0.2104542553, 0.7936177850, -0.0040720468],
        [1.9779984951, -2.4285922050, 0.4505937099],
        [0.0259040371, 0.7827717662, -0.8086757660],
    ]
)


def linear(colour: str) -> np.ndarray:
    """Return the linear RGB of a colour such as #346AAC."""
    part = np.array([int(colour[i : i + 2], 16) for i in (1, 3, 5)]) / 255
    return np.where(part <= 0.04045, part / 12.92, ((part + 0.055) / 1.055) ** 2.4)


def seen(colour: str, vision: str) -> np.ndarray:
    """Return the OKLab coordinates, times 100, of a colour under a kind of vision."""
    rgb = np.clip(VISIONS[vision] @ linear(colour), 0, 1)
    return 100 * (_LAB @ np.cbrt(_LMS @ rgb))


def distance(one: str, other: str, vision: str = "usual") -> float:
    """Return how far two colours are from each other, in OKLab units times 100."""
    return float(np.linalg.norm(seen(one, vision) - seen(other, vision)))


def luminance(colour: str) -> float:
    """Return the relative luminance of WCAG 2.2, 0 to 1: what a grey print keeps."""
    return float(linear(colour) @ [0.2126, 0.7152, 0.0722])


def contrast(one: str, other: str) -> float:
    """Return the contrast ratio of WCAG 2.2, 1 to 21."""
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)
