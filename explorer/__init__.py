"""Blending of source waters and dosing of treatment chemicals, explored."""

import os

# The matrices of the equilibrium are small: threads in the linear algebra gain nothing, and on a machine that
# is busy otherwise they wait for each other ten times as long as the work takes. This has to be said
# before NumPy is loaded; who has set it otherwise keeps it so.
for library in ("OPENBLAS", "OMP", "MKL"):
    os.environ.setdefault(f"{library}_NUM_THREADS", "1")

__version__ = "0.1.0"
