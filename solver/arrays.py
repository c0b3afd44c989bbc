"""Names for the kinds of arrays that the solver works on."""

import numpy as np
from numpy.typing import NDArray

Complex = NDArray[np.complex128]
Real = NDArray[np.float64]
Index = NDArray[np.intp]
Flag = NDArray[np.bool_]
