"""Sine and cosine of a block of angles, written so that the compiler turns it into vector code.

Left out: angles beyond a million radians take the C library's functions, one at a time.
"""

import math

import numpy as np

from kinematics.kernels.compiler import compiled
from kinematics.kernels.workspace import COSINE, SINE
from kinematics.number_checks import FloatArray

# Half a turn's half in three parts, the first two of 33 bits: their products with a whole number
# below 2^20 are exact (Cody and Waite 1980).
_PART_1 = float.fromhex("0x1.921fb54400000p+0")
_PART_2 = float.fromhex("0x1.0b4611a600000p-34")
_PART_3 = float.fromhex("0x1.3198a2e037073p-69")
_PER_QUARTER = 2.0 / math.pi
_LARGEST = 1e6

# Polynomials in z = r^2 for (sin r / r - 1) / z and (cos r - 1 + z / 2) / z^2 that meet them at the
# Chebyshev points of 0 ... (pi/4)^2: sine and cosine within 2e-17 and 1e-18, with two terms less
# than by their Taylor series. A test works them out anew.
SINE_TERMS = tuple(
    map(
        float.fromhex,
        (
            *("-0x1.5555555555555p-3", "0x1.1111111110bb2p-7", "-0x1.a01a019e83816p-13"),
            *("0x1.71de379654304p-19", "-0x1.ae600aca92c64p-26", "0x1.5e0b05bff20f2p-33"),
        ),
    )
)
COSINE_TERMS = tuple(
    map(
        float.fromhex,
        (
            *("0x1.5555555555555p-5", "-0x1.6c16c16c16967p-10", "0x1.a01a019f4e9b4p-16"),
            *("-0x1.27e4fa17bf139p-22", "0x1.1eeb68cd22f56p-29", "-0x1.907d8f29fe831p-37"),
        ),
    )
)
_S0, _S1, _S2, _S3, _S4, _S5 = SINE_TERMS
_C0, _C1, _C2, _C3, _C4, _C5 = COSINE_TERMS


@compiled
def sine_cosine(
    work: FloatArray, count: int, largest: float, cos_offset: float, sin_offset: float
) -> None:
    """Turn the angles in the cosine slot into cosine and sine of angle + offset.

    Parameters
    ----------
    work : workspace; angles (rad) in its cosine slot.
    count : postures in the block.
    largest : size that no angle of the block exceeds.
    cos_offset, sin_offset : of the constant offset, added by the angle sum so that it is never
        rounded against a large angle.

    Examples
    --------
    >>> work = np.zeros(2 * SINE)
    >>> work[:2] = [0.0, np.pi / 6]
    >>> sine_cosine(work, 2, 1.0, 1.0, 0.0)
    >>> work[SINE : SINE + 2].round(15)
    array([0. , 0.5])
    """
    if largest > _LARGEST:
        for b in range(count):
            angle = work[COSINE + b]
            cosine, sine = math.cos(angle), math.sin(angle)
            work[COSINE + b] = cosine * cos_offset - sine * sin_offset
            work[SINE + b] = sine * cos_offset + cosine * sin_offset
        return
    for b in range(count):
        angle = work[COSINE + b]
        quarters = np.rint(angle * _PER_QUARTER)
        r = ((angle - quarters * _PART_1) - quarters * _PART_2) - quarters * _PART_3
        z = r * r
        odd = _S0 + z * (_S1 + z * (_S2 + z * (_S3 + z * (_S4 + z * _S5))))
        odd = r + r * z * odd
        even = _C0 + z * (_C1 + z * (_C2 + z * (_C3 + z * (_C4 + z * _C5))))
        even = 1.0 + z * (z * even - 0.5)
        quadrant = np.int64(quarters)
        swapped = (quadrant & 1) != 0
        sine = even if swapped else odd
        cosine = odd if swapped else even
        sine = -sine if (quadrant & 2) != 0 else sine
        cosine = -cosine if ((quadrant + 1) & 2) != 0 else cosine
        work[COSINE + b] = cosine * cos_offset - sine * sin_offset
        work[SINE + b] = sine * cos_offset + cosine * sin_offset
