"""Layered wells solved by transfer matrices: how many levels lie below an energy, independent of specterm.

By the oscillation theorem that is the number of zeros of the solution that meets the condition on the left; inside a layer the
solution is a sine or a sum of exponentials, so its zeros are counted in closed form.
"""

import math
from dataclasses import dataclass


@dataclass(frozen=True)
class Layer:
    """One layer: hbar = 1, H = p (1/2m) p + height."""

    thickness: float
    height: float
    mass: float


def sheet(layers, domain):
    """Return the sheet of the layers; `domain` as written there."""
    rows = "\n".join(f"   {v.thickness!r}  {v.height!r}  {v.mass!r}" for v in layers)
    return f"H = p*(1/(2*m))*p + V\nlayers x: thickness, V, m\n{rows}\nx in {domain}"


def between_walls(layers, energy):
    """Return the number of levels below `energy` with walls at both ends."""
    psi, flux, zeros = 0.0, 1.0, 0
    for layer in layers:
        psi, flux, more = cross(layer, energy, psi, flux)
        zeros += more
    return zeros


def forever(layers, energy):
    """Return the number of levels below `energy`, below both outer heights, where the outer layers go on for ever."""
    first, last = layers[0], layers[-1]
    psi, flux, zeros = 1.0, math.sqrt(2 * first.mass * (first.height - energy)) / first.mass, 0
    for layer in layers[1:-1]:
        psi, flux, more = cross(layer, energy, psi, flux)
        zeros += more
    growing = flux + psi * math.sqrt(2 * last.mass * (last.height - energy)) / last.mass
    return zeros + (growing * psi < 0)


def cross(layer, energy, psi, flux):
    """Carry psi and flux psi'/m to the far side; return both, rescaled, and the zeros met behind the start."""
    kinetic = 2 * layer.mass * (energy - layer.height)
    slope, length = flux * layer.mass, layer.thickness
    if kinetic > 0:
        k = math.sqrt(kinetic)
        angle = math.atan2(psi, slope / k)
        end = angle + k * length
        zeros = math.floor(end / math.pi) - math.floor(angle / math.pi)
        size = math.hypot(psi, slope / k)
        far, far_slope = size * math.sin(end), size * k * math.cos(end)
    else:
        k = math.sqrt(-kinetic)
        ch, sh = math.cosh(k * length), math.sinh(k * length)
        far, far_slope = psi * ch + (slope * sh / k if k else slope * length), psi * k * sh + slope * ch
        zeros = int(psi * far < 0)
    norm = max(abs(far), abs(far_slope / layer.mass))
    return far / norm, far_slope / layer.mass / norm, zeros
