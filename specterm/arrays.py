"""Names for the arrays that pass between the parts."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
"""Real numbers."""
Values = NDArray[Any]
"""Real or complex numbers."""
Counts = NDArray[np.int64]
Flags = NDArray[np.bool_]
