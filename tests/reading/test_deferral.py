"""cclib is imported without packages its parsers never use, and everybody who wants those afterwards has them."""

from __future__ import annotations

import subprocess
import sys

from heatwright.resources import sample_outputs

AFTER_READING = """
import sys
from heatwright import read_output
assert read_output(sys.argv[1]).wavenumbers_cm1.size == 1
assert "scipy.spatial" not in sys.modules and "scipy.constants" not in sys.modules and "cclib.bridge" not in sys.modules
import numpy as np
import cclib
import cclib.parser.utils
square = np.array([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]])
turned = cclib.parser.utils.get_rotation(square, square[[1, 0, 2]])
assert type(turned).__module__.startswith("scipy.spatial")
assert cclib.bridge.__name__ == "cclib.bridge" and isinstance(cclib.bridge.__path__, list)
from scipy.spatial import ConvexHull
from cclib.method import Nuclear
hydroxyl = cclib.io.ccread(sys.argv[1])
assert Nuclear(hydroxyl).repulsion_energy() > 0.0  # asks for a constant
import scipy.constants
assert scipy.constants.__spec__ is not None and scipy.constants.c == 299792458.0
import cclib.bridge
assert cclib.bridge.__spec__ is not None
assert cclib.io.ccread(sys.argv[1]).vibfreqs.size == 6
import importlib.util
if importlib.util.find_spec("pandas"):
    assert "pandas" not in sys.modules
    assert cclib.io.ccframe([cclib.io.ccread(sys.argv[1])]).shape[0] == 1
    import pandas
    assert pandas.DataFrame.__module__.startswith("pandas") and pandas.__spec__ is not None
"""


def test_the_stand_ins_leave_no_trace() -> None:
    file = str(sample_outputs() / "OH.out")
    done = subprocess.run([sys.executable, "-c", AFTER_READING, file], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
