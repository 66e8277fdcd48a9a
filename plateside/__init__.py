"""plateside: puts its four layers first on the import path.

In a checkout they are the folders beside this one. In a wheel they lie in
``plateside/layers``, where no other package called ``rules`` or ``calc`` can
overwrite them or be overwritten.
"""

import sys

# Before anything that an older Python does not know; Python 2 can read this far.
if sys.version_info < (3, 11):
    sys.exit("plateside: needs Python 3.11 or newer; this is %d.%d" % sys.version_info[:2])

import os
from pathlib import Path

# One diagnosis works on small matrices: BLAS threads only cost start-up time and key latency.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

_here = Path(__file__).resolve().parent
_installed = _here / "layers"
sys.path.insert(0, str(_installed if _installed.is_dir() else _here.parent))
