"""Farend, the drawing board."""

import os

# Our matrices are small: threads of the linear algebra cost a tenth of the start and would win nothing, and
# with one the figures are the same to the last bit on every machine. It must stand before numpy is loaded.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
