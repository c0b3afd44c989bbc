"""What a start must not load: whatever only later work needs waits until that work is asked for."""

import subprocess
import sys
from pathlib import Path

SAMPLE = Path(__file__).resolve().parents[2] / "samples" / "fernhollow_pair.farend"
LATER = (  # each with who loads it
    "pint",  # a unit that is seldom typed
    "xlsxwriter",  # a sheet
    "json.tool",
    "networkx",
    "scipy",
    "app.sheet",
    "app.printed",  # results as text
    "app.study.record",
    "app.study.year",  # a year
    "app.study.year_outcome",
    "app.panels.year_page",
    "app.panels.year_table",
    "app.panels.profiles_page",
    "app.panels.course_plot",
    "app.panels.about",
    "app.panels.terminals",
    "app.canvas.picture",
    "app.study.collapse",  # a layout that does not stand
    "app.study.idle",  # a ring
    "app.study.wire_rows",  # phases that are not alike
    "app.study.wire_nodes",
    "app.study.wire_branches",
    "app.study.fault_conductors",
)
STARTED = """
import sys
from pathlib import Path
from PySide6.QtWidgets import QApplication
import app.__main__
before = sorted(name for name in ("numpy", "app.study", "app.model.file") if name in sys.modules)
from app.live.preferences import Preferences
from app.window import Window
application = QApplication(sys.argv[:1])
folder = Path(sys.argv[1])
window = Window(Preferences(folder / "likes.ini"), folder)
window.show()
window.menus.open_path(folder / sys.argv[2])
application.processEvents()
window.solving.settle_solve()
application.processEvents()
assert window.solving.outcome.status.name == "SOLVED"
print(*before, *sys.modules)
window.close()
"""


def test_a_window_on_a_balanced_layout_loads_nothing_that_it_does_not_need(tmp_path):
    (tmp_path / SAMPLE.name).write_bytes(SAMPLE.read_bytes())
    command = [sys.executable, "-c", STARTED, str(tmp_path), SAMPLE.name]
    run = subprocess.run(command, capture_output=True, text=True, check=False, timeout=120)
    assert run.returncode == 0, run.stderr
    loaded = run.stdout.split()
    assert loaded[0] == "sys", "a command line that is only read loads no physics"
    assert "app.study.run" in loaded
    assert [name for name in LATER if name in loaded] == []
