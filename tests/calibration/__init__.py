"""The calibration bench: surveys with known truth, assessed and counted.

Run from a clone: ``python -m tests.calibration --help``.
"""

import os

# one thread for linear algebra, before numpy comes: the same bits on any number of cores
for _name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_name, "1")
