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

# Taylor series on [-pi/4, pi/4]: the first terms left out are below 5e-17 and 2e-18.
_S3, _S5, _S7, _S9, _S11, _S13, _S15 = ((-1) ** k / math.factorial(2 * k + 1) for k in range(1, 8))
_C2, _C4, _C6, _C8, _C10, _C12, _C14, _C16 = (
    (-1) ** k / math.factorial(2 * k) for k in range(1, 9)
)


@compiled
def sine_cosine(work: FloatArray, count: int, cos_offset: float, sin_offset: float) -> None:
    """Turn the angles in the cosine slot into cosine and sine of angle + offset.

    Parameters
    ----------
    work : workspace; angles (rad) in its cosine slot.
    count : postures in the block.
    cos_offset, sin_offset : of the constant offset, added by the angle sum so that it is never
        rounded against a large angle.

    Examples
    --------
    >>> work = np.zeros(2 * SINE)
    >>> work[:2] = [0.0, np.pi / 6]
    >>> sine_cosine(work, 2, 1.0, 0.0)
    >>> work[SINE : SINE + 2].round(15)
    array([0. , 0.5])
    """
    largest = 0.0
    for b in range(count):
        largest = max(largest, abs(work[COSINE + b]))
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
        odd = _S9 + z * (_S11 + z * (_S13 + z * _S15))
        odd = r + r * z * (_S3 + z * (_S5 + z * (_S7 + z * odd)))
        even = _C10 + z * (_C12 + z * (_C14 + z * _C16))
        even = 1.0 + z * (_C2 + z * (_C4 + z * (_C6 + z * (_C8 + z * even))))
        quadrant = np.int64(quarters)
        swapped = (quadrant & 1) != 0
        sine = even if swapped else odd
        cosine = odd if swapped else even
        sine = -sine if (quadrant & 2) != 0 else sine
        cosine = -cosine if ((quadrant + 1) & 2) != 0 else cosine
        work[COSINE + b] = cosine * cos_offset - sine * sin_offset
        work[SINE + b] = sine * cos_offset + cosine * sin_offset
