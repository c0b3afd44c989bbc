"""The headless commands: texts, JSON, exit codes, and no Qt where none is needed."""

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import msgspec
import numpy as np
import pytest
from study_layouts import changed, drawing, two_nodes

from app.__main__ import main
from app.model.drawing import Drawing, Limits, Project
from app.model.file import save
from app.model.kinds import Busbar, Load, Supply
from app.study import run
from app.study.cautions import CAUTIONS

ROOT = Path(__file__).resolve().parents[2]
SAMPLE = ROOT / "samples" / "fernhollow_pair.farend"


def weak():
    return changed(two_nodes(), L1=Load(node="B2", demand_kva=9000.0))


def stored(folder, base, name="x.farend"):
    path = folder / name
    save(base, path)
    return str(path)


@pytest.mark.parametrize(
    ("make", "code"),
    [
        (two_nodes, 0),
        (lambda: msgspec.structs.replace(two_nodes(), limits=Limits(low_percent=99.99)), 1),
        (lambda: changed(two_nodes(), S2=Supply(node="B1")), 2),
        (Drawing, 2),
        (weak, 3),
    ],
)
def test_exit_codes_of_every_command(make, code, tmp_path, capsys):
    path = stored(tmp_path, make())
    assert main(["results", path]) == code
    assert main(["results", path, "--json"]) == code
    assert main(["sheet", path, "-o", str(tmp_path / "out.csv")]) == code
    assert main(["sheet", path, "-o", str(tmp_path / "out.xlsx")]) == code
    assert (tmp_path / "out.xlsx").stat().st_size > 0
    assert capsys.readouterr().err == ""


def test_json_holds_every_figure_of_the_outcome_unrounded(tmp_path, capsys):
    base = changed(two_nodes(), B9=Busbar(name="Dead end"))
    assert main(["results", stored(tmp_path, base), "--json"]) == 0
    told, outcome = json.loads(capsys.readouterr().out), run(base)
    assert told["status"] == "solved"
    assert told["cases"] == ["As drawn"]
    for name in ("nodes", "branches", "attachments"):
        table = getattr(outcome, name)
        assert list(told[name]) == list(table.ids)
        for column, values in table.columns.items():
            for id, row in table.rows.items():
                value = np.atleast_1d(values[row]).tolist()
                want = [None if v != v else v for v in value]
                got = told[name][id][column]
                assert (got if isinstance(got, list) else [got]) == want
    assert told["nodes"]["B9"] == {
        "name": "Dead end", "kind": "busbar", "live": False, "nominal_v": None, "voltage_v": [None],
        "percent": [None], "high_percent": [None], "angle_deg": [None], "drop_percent": [None],
        "route_m": None,
    }  # fmt: skip
    assert told["balance"]["loss_kw"] == outcome.balance.loss_kw.tolist()
    assert [f["sentence"] for f in told["findings"]] == [f.sentence for f in outcome.findings]
    assert {f["verdict"] for f in told["findings"]} == {"holds", "note"}
    assert told["assumptions"][0]["unit"]
    assert told["fed_by"] == {"B2": "C1"}
    assert told["cautions"] == list(CAUTIONS)


def test_json_is_the_same_every_time(capsys):
    main(["results", str(SAMPLE), "--json"])
    first = capsys.readouterr().out
    main(["results", str(SAMPLE), "--json"])
    assert capsys.readouterr().out == first
    assert "seconds" not in first


def test_json_of_a_collapse_names_share_and_branch(tmp_path, capsys):
    assert main(["results", stored(tmp_path, weak()), "--json"]) == 3
    told = json.loads(capsys.readouterr().out)
    assert told["status"] == "no_operating_point"
    assert 0 < told["largest_share_percent"] < 100
    assert told["to_blame"] == "C1"
    assert told["nodes"]["B2"]["voltage_v"] == [None]


def test_the_text_is_aligned_and_says_its_units(tmp_path, capsys):
    base = msgspec.structs.replace(two_nodes(), project=Project(title="Yard", place="Hill", revision="B"))
    main(["results", stored(tmp_path, base)])
    text = capsys.readouterr().out
    lines = text.splitlines()
    assert lines[:3] == ["Yard", "Hill, revision B", "Solved. Every check holds."]
    head = next(i for i, line in enumerate(lines) if line.startswith("  id") and "loss kW" in line)
    end = lines[head].index("loss kW") + len("loss kW")
    assert lines[head + 1][end - 1].isdigit()
    assert "closure" in text
    assert all(caution in text for caution in CAUTIONS)
    assert text.index("Cautions") > text.index("Assumed, to be confirmed") > text.index("Findings")
    assert "C1: capacitance 0 µF/km (neglected)" in text


def test_without_a_solution_the_text_shows_no_figures(tmp_path, capsys):
    main(["results", stored(tmp_path, weak())])
    text = capsys.readouterr().out
    assert "NOT SOLVED: The layout cannot carry its load" in text
    assert "Nodes" not in text
    assert "Balance" not in text


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["results"], "farend results: the following arguments are required: FILE"),
        (["results", "{}/none.farend"], "none.farend does not exist"),
        (["results", "{}/bad.farend"], "bad.farend"),
        (["results", "{}"], "is no file"),
        (["sheet", "{}/x.farend"], "the following arguments are required: -o/--out"),
        (["sheet", "{}/x.farend", "-o", "{}/x.pdf"], "allowed are .xlsx, .csv"),
        (["sheet", "{}/x.farend", "-o", "{}/no/x.csv"], "there is no folder"),
        (["picture", "{}/x.farend", "-o", "{}/x"], "allowed are .svg, .png, .pdf"),
        (
            ["picture", "{}/x.farend", "-o", "{}/x.svg", "--case", "Gala"],
            "there is no case 'Gala'; the cases are As drawn",
        ),
        (["picture", "{}/x.farend", "-o", "{}/x.svg", "--symbols", "MINE"], "invalid choice"),
        (["results", "{}/x.farend", "--jsno"], "unrecognized arguments: --jsno"),
        (["{}/x.farend", "{}/y.farend"], "unrecognized arguments"),
    ],
)
def test_bad_input_is_one_line_on_stderr(arguments, words, tmp_path, capsys):
    stored(tmp_path, two_nodes())
    (tmp_path / "bad.farend").write_text('{"farend": 1, "elements": [', encoding="utf-8")
    given = [a.replace("{}", str(tmp_path)) for a in arguments]
    try:
        code = main(given)
    except SystemExit as end:
        code = end.code
    out, err = capsys.readouterr()
    assert code == 2
    assert words in err
    assert err.count("\n") == 1
    assert out == ""


def test_help_and_version(capsys):
    for arguments in (["--help"], ["results", "--help"], ["sheet", "--help"], ["picture", "--help"]):
        with pytest.raises(SystemExit) as end:
            main(arguments)
        assert end.value.code == 0
        assert "3  no operating point" in capsys.readouterr().out
    with pytest.raises(SystemExit) as end:
        main(["--version"])
    assert end.value.code == 0
    assert capsys.readouterr().out.startswith("farend ")


def in_process(*arguments, code=None, **environment):
    """Another Python, without the screen this one may have; `None` takes a variable away."""
    given = {**os.environ, "QT_QPA_PLATFORM": None, "DISPLAY": None, "WAYLAND_DISPLAY": None, **environment}
    command = [sys.executable, "-c", code] if code else [sys.executable, "-m", "app", *arguments]
    return subprocess.run(
        command, capture_output=True, text=True, cwd=ROOT, check=False, timeout=120,
        encoding="utf-8", env={k: v for k, v in given.items() if v is not None},
    )  # fmt: skip


@pytest.mark.parametrize(
    "command", [["results", "{}"], ["results", "{}", "--json"], ["sheet", "{}", "-o", "{}.csv"]]
)
def test_only_windows_and_pictures_load_qt(command, tmp_path):
    path = stored(tmp_path, two_nodes())
    given = [a.replace("{}", path) for a in command]
    code = (
        "import sys; from app.__main__ import main\n"
        f"assert main({given!r}) == 0\n"
        "assert not [m for m in sys.modules if 'PySide6' in m or 'pyqtgraph' in m]"
    )
    done = in_process(code=code)
    assert done.returncode == 0, done.stderr


def test_a_picture_needs_no_screen(tmp_path):
    out = tmp_path / "x.svg"
    done = in_process("picture", str(SAMPLE), "-o", str(out), "--dark", "--symbols", "ANSI")
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    assert "<svg" in out.read_text(encoding="utf-8")


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="elsewhere there is always a desktop")
@pytest.mark.parametrize(
    ("environment", "words"),
    [
        ({}, "neither DISPLAY nor WAYLAND_DISPLAY is set"),
        ({"DISPLAY": ":4711"}, "the display :4711 cannot be reached"),
        ({"DISPLAY": "nonsense"}, "the display nonsense cannot be reached"),
        ({"WAYLAND_DISPLAY": "nowhere"}, "the display nowhere cannot be reached"),
        ({"QT_QPA_PLATFORM": "nonsense"}, "QT_QPA_PLATFORM=nonsense is not known"),
        ({"QT_QPA_PLATFORM": "xcb"}, "DISPLAY is not set"),
        ({"QT_QPA_PLATFORM": "xcb", "DISPLAY": ":4711"}, "the display :4711 cannot be reached"),
        ({"QT_QPA_PLATFORM": "wayland;xcb", "DISPLAY": ":4711"}, "the display :4711 cannot be reached"),
        ({"QT_QPA_PLATFORM": "linuxfb"}, "QT_QPA_PLATFORM=linuxfb draws no desktop windows"),
    ],
)
def test_without_a_screen_one_line_names_the_headless_commands(environment, words):
    done = in_process(str(SAMPLE), **environment)
    assert done.returncode == 2
    assert words in done.stderr
    assert "farend results FILE" in done.stderr
    assert done.stderr.count("\n") == 1
    assert done.stdout == ""


@pytest.mark.skipif(shutil.which("Xvfb") is None, reason="no X server to try")
def test_a_screen_that_answers_is_taken(tmp_path):
    read, write = os.pipe()
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", "640x480x24"],
        pass_fds=(write,),
        stderr=subprocess.DEVNULL,
    )
    try:
        os.close(write)
        with os.fdopen(read) as told:
            display = f":{told.readline().strip()}"
        code = "from app.screen import why_no_screen; print(why_no_screen())"
        assert in_process(code=code, DISPLAY=display).stdout == "None\n"
        assert in_process(code=code, DISPLAY=display, WAYLAND_DISPLAY="nowhere").stdout == "None\n"
        assert in_process(code=code, DISPLAY=display, QT_QPA_PLATFORM="wayland;xcb").stdout == "None\n"
    finally:
        server.terminate()
        server.wait()


def test_a_reader_that_stops_early_is_no_error():
    run_it = f"{sys.executable} -m app results samples/kettlewick_open.farend --json"
    done = subprocess.run(
        ["bash", "-c", f"set -o pipefail; for i in 1 2 3; do {run_it}; done | head -c 100 >/dev/null"],
        capture_output=True, text=True, cwd=ROOT, check=False,
    )  # fmt: skip
    assert done.stderr == ""


@pytest.mark.parametrize("encoding", ["ascii", "latin-1", "cp1252", "utf-8"])
def test_any_terminal_can_show_the_text(encoding):
    done = subprocess.run(
        [sys.executable, "-m", "app", "results", str(SAMPLE)],
        capture_output=True, cwd=ROOT, check=False, env={**os.environ, "PYTHONIOENCODING": encoding},
    )  # fmt: skip
    assert done.returncode == 0
    assert done.stderr == b""
    assert "House" in done.stdout.decode(encoding)


def test_a_file_called_like_a_command_opens_by_its_path(tmp_path):
    stored(tmp_path, drawing(B1=Busbar()), "results")
    done = in_process(str(tmp_path / "results"))
    assert "no window can be opened here" in done.stderr
