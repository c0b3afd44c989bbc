"""From the start of the process to a usable window on a sample, against an empty window of the same toolkit.

Goal: at most 2.5. Printed, never asserted: `FAREND_BENCHMARK=1 pytest -s tests/benchmarks/test_start.py`.
"""

import os
import subprocess
import sys
from pathlib import Path
from statistics import median
from time import perf_counter

ROUNDS = 9 if os.environ.get("FAREND_BENCHMARK") == "1" else 1
SAMPLE = Path(__file__).resolve().parents[2] / "samples" / "fernhollow_pair.farend"
EMPTY = """
import sys
from PySide6.QtWidgets import QApplication, QMainWindow
app = QApplication(sys.argv[:1])
window = QMainWindow()
window.resize(1440, 900)
window.show()
app.processEvents()
"""
OURS = """
import sys
from PySide6.QtWidgets import QApplication
def usable():
    window = next(w for w in QApplication.topLevelWidgets() if hasattr(w, "solving"))
    QApplication.processEvents()
    window.solving.settle()
    QApplication.processEvents()
    assert window.solving.outcome.status.name == "SOLVED"
    window.close()
    return 0
QApplication.exec = staticmethod(usable)  # in place of waiting for the hand
from app.__main__ import main
sys.exit(main(sys.argv[1:]))
"""


def seconds(script: str, folder: Path) -> float:
    """Wall seconds of one process; bytecode is kept in the folder, as an installed program keeps it."""
    env = {k: v for k, v in os.environ.items() if k != "PYTHONDONTWRITEBYTECODE"}
    env |= {"PYTHONPYCACHEPREFIX": str(folder / "bytecode"), "HOME": str(folder)}
    env |= {f"XDG_{kind}_HOME": str(folder / kind.lower()) for kind in ("CONFIG", "DATA", "CACHE")}
    start = perf_counter()
    subprocess.run(
        [sys.executable, "-c", script, str(folder / SAMPLE.name)], check=True, capture_output=True, env=env
    )
    return perf_counter() - start


def test_start_against_an_empty_window(tmp_path):
    (tmp_path / SAMPLE.name).write_bytes(SAMPLE.read_bytes())
    seconds(EMPTY, tmp_path), seconds(OURS, tmp_path)  # the first start writes the bytecode
    pairs = [(seconds(EMPTY, tmp_path), seconds(OURS, tmp_path)) for _ in range(ROUNDS)]
    empty, ours = median(p[0] for p in pairs), median(p[1] for p in pairs)
    ratio = median(b / a for a, b in pairs)
    print(f"\nempty window {empty:.2f} s, Farend on a sample {ours:.2f} s, ratio {ratio:.2f} (goal 2.5)")
    assert ratio > 0
