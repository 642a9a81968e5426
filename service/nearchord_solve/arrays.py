"""Array types of the solver, by element."""

import numpy as np
from numpy.typing import NDArray

I32 = NDArray[np.int32]
I64 = NDArray[np.int64]
U8 = NDArray[np.uint8]
U32 = NDArray[np.uint32]
U64 = NDArray[np.uint64]
F64 = NDArray[np.float64]
