"""Names for the array types that the signatures of `core` use."""

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
Float32Array = npt.NDArray[np.float32]
IntArray = npt.NDArray[np.intp]
IndexArray = npt.NDArray[np.uint32]
BoolArray = npt.NDArray[np.bool_]


def read_only(array: FloatArray) -> FloatArray:
    """Return a contiguous float64 copy that cannot be written to."""
    frozen = np.array(array, dtype=np.float64, order="C")
    frozen.flags.writeable = False
    return frozen
