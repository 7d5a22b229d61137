"""Sine and cosine of an angle in degrees, to the nearest double where the value is known exactly."""

from __future__ import annotations

import math

_EXACT_SINE = {0.0: 0.0, 30.0: 0.5, 45.0: math.sqrt(0.5), 60.0: math.sqrt(0.75), 90.0: 1.0}


def sine_degrees(angle: float) -> float:
    """Return the sine of 0 to 90 degrees; nearest double at 0, 30, 45, 60 and 90."""
    return _EXACT_SINE.get(angle, math.sin(math.radians(angle)))


def cosine_degrees(angle: float) -> float:
    """Return the cosine of 0 to 90 degrees, right to the last digits also next to 90."""
    if angle <= 45.0:
        exact = {0.0: 1.0, 30.0: math.sqrt(0.75), 45.0: math.sqrt(0.5)}
        return exact.get(angle, math.cos(math.radians(angle)))
    return sine_degrees(90.0 - angle)
