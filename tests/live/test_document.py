"""The file behind the drawing: saved, locked, recovered; nothing is lost."""

import subprocess
import sys
from pathlib import Path

import pytest

from app.live.document import Document
from app.live.locks import FileLock, lock_path
from app.live.session import Session
from app.model import edits
from app.model.drawing import Drawing
from app.model.errors import FileError
from app.model.file import load, save
from app.model.kinds import Joint


class Desk:
    """One window's session and document."""

    def __init__(self, folder: Path) -> None:
        self.session = Session(Drawing())
        self.document = Document(self.session, recovery_folder=folder)

    def draw(self, x: float = 0.0) -> None:
        assert self.session.edit("Place joint", lambda d: edits.drop(d, Joint(), x, 0.0)) == ""

    @property
    def count(self) -> int:
        return len(self.session.drawing.elements)


@pytest.fixture
def folder(tmp_path):
    return tmp_path / "recovery"


@pytest.fixture
def desk(qapp, folder):
    made = Desk(folder)
    yield made
    made.document.close()


@pytest.fixture
def other(qapp, folder):
    made = Desk(folder)
    yield made
    made.document.close()


def one_joint() -> Drawing:
    return Drawing(elements={"J1": Joint()})


def test_save_as_adds_the_suffix_and_the_mark_goes(desk, tmp_path, qtbot):
    desk.draw()
    assert desk.document.modified
    with qtbot.waitSignal(desk.document.saved):
        desk.document.save_as(tmp_path / "yard")
    assert desk.document.path == tmp_path / "yard.farend"
    assert not desk.document.modified
    assert load(tmp_path / "yard.farend") == desk.session.drawing


def test_save_writes_where_it_came_from(desk, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    assert desk.document.load(path) is None
    desk.draw(5.0)
    desk.document.save()
    assert len(load(path).elements) == 2
    desk.session.history.undo()
    assert desk.document.modified


def test_a_drawing_without_a_file_asks_for_a_name(desk):
    with pytest.raises(FileError, match="no file yet"):
        desk.document.save()


@pytest.mark.parametrize("data", [b"", b"{", b"\x00\xff", b'{"farend": 999}', b"[1, 2]"])
def test_a_damaged_file_leaves_the_open_drawing_its_file_and_its_history_alone(desk, tmp_path, data):
    good, bad = tmp_path / "good.farend", tmp_path / "bad.farend"
    save(one_joint(), good)
    bad.write_bytes(data)
    desk.document.load(good)
    desk.draw(3.0)
    before = desk.session.drawing
    with pytest.raises(FileError, match=r"bad\.farend"):
        desk.document.load(bad)
    assert desk.session.drawing is before
    assert desk.document.path == good
    assert desk.session.history.count() == 1
    assert lock_path(good).exists()
    assert not lock_path(bad).exists()


def test_a_failed_save_keeps_the_mark_and_the_file(desk, tmp_path):
    desk.draw()
    with pytest.raises(FileError):
        desk.document.save_as(tmp_path / "nowhere" / "yard.farend")
    assert desk.document.modified
    assert desk.document.path is None


def test_a_second_window_on_the_same_file_is_told_who_has_it(desk, other, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    assert desk.document.load(path) is None
    told = other.document.load(path)
    assert told is not None
    assert "yard.farend is already open in another window (process " in told
    assert other.count == 1
    desk.document.close()
    assert other.document.load(path) is None


def test_opening_the_same_file_again_in_its_own_window_is_no_conflict(desk, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    desk.document.load(path)
    assert desk.document.load(path) is None
    assert lock_path(path).exists()


def test_saving_onto_a_file_that_another_window_has_open_is_refused(desk, other, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    other.document.load(path)
    desk.draw()
    desk.draw(4.0)
    with pytest.raises(FileError, match="already open in another window"):
        desk.document.save_as(path)
    assert len(load(path).elements) == 1


def test_the_lock_goes_when_another_file_is_opened_and_when_all_is_closed(desk, tmp_path):
    first, second = tmp_path / "a.farend", tmp_path / "b.farend"
    save(one_joint(), first)
    save(one_joint(), second)
    desk.document.load(first)
    desk.document.load(second)
    assert not lock_path(first).exists()
    assert lock_path(second).exists()
    desk.document.start(Drawing())
    assert not lock_path(second).exists()


def test_a_lock_left_by_a_program_that_is_gone_counts_for_nothing(desk, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    die = "import os, sys; from pathlib import Path; from app.live.locks import FileLock; "
    die += "lock = FileLock(Path(sys.argv[1])); assert lock.sentence is None; os._exit(1)"
    subprocess.run([sys.executable, "-c", die, str(path)], check=False)
    assert lock_path(path).exists()
    assert desk.document.load(path) is None


def test_where_no_lock_can_be_kept_the_file_opens_all_the_same(qapp, tmp_path):
    lock = FileLock(tmp_path / "no such folder" / "yard.farend")
    assert lock.sentence is None
    lock.release()


def test_a_change_by_somebody_else_is_noticed_before_it_is_written_over(desk, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    desk.document.load(path)
    assert not desk.document.changed_on_disk()
    save(Drawing(elements={"J1": Joint(), "J2": Joint(x=9.0)}), path)
    assert desk.document.changed_on_disk()
    desk.document.save()
    assert not desk.document.changed_on_disk()
    path.unlink()
    assert desk.document.changed_on_disk()


def test_an_edit_is_in_the_recovery_copy_within_seconds_and_gone_after_a_save(desk, folder, tmp_path, qtbot):
    desk.document._soon.setInterval(20)
    desk.draw()
    qtbot.waitUntil(lambda: len(list(folder.glob("*.farend"))) == 1)
    (copy,) = folder.glob("*.farend")
    assert load(copy) == desk.session.drawing
    desk.document.save_as(tmp_path / "yard.farend")
    assert list(folder.iterdir()) == []


def test_undoing_to_the_saved_drawing_needs_no_recovery_copy(desk, folder):
    desk.draw()
    desk.document.keep_copy()
    assert list(folder.glob("*.farend"))
    desk.session.history.undo()
    assert not list(folder.glob("*.farend"))


def test_a_clean_close_leaves_nothing_behind(desk, folder, tmp_path):
    desk.document.save_as(tmp_path / "yard.farend")
    desk.draw()
    desk.document.keep_copy()
    desk.document.close()
    assert list(folder.iterdir()) == []
    assert [p.name for p in tmp_path.iterdir() if p.name.startswith(".")] == []


CRASH = """
import os, sys
from pathlib import Path
from PySide6.QtCore import QCoreApplication
app = QCoreApplication([])
from app.live.document import Document
from app.live.session import Session
from app.model import edits
from app.model.kinds import Joint
session = Session()
document = Document(session, recovery_folder=Path(sys.argv[1]))
document.load(Path(sys.argv[2]))
session.edit("Place joint", lambda d: edits.drop(d, Joint(), 7.0, 1.0))
document.keep_copy()
os._exit(9)
"""


def test_after_a_crash_the_copy_is_offered_opened_unsaved_and_forgotten(desk, other, folder, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    subprocess.run([sys.executable, "-c", CRASH, str(folder), str(path)], check=False)
    (copy,) = desk.document.recoverable()
    assert (copy.title, copy.path) == ("yard.farend", path)
    assert other.document.recoverable() == []  # offered in one window only
    assert desk.document.recover(copy) is None
    assert desk.count == 2
    assert desk.document.path == path
    assert desk.document.modified
    assert desk.document.recoverable() == []
    assert len(load(path).elements) == 1
    desk.document.save()
    assert len(load(path).elements) == 2
    assert list(folder.iterdir()) == []


def test_a_copy_of_a_window_that_still_runs_is_not_offered(desk, other):
    desk.draw()
    desk.document.keep_copy()
    assert other.document.recoverable() == []


def test_a_refused_copy_is_thrown_away_and_an_unanswered_one_stays(desk, other, folder, tmp_path):
    path = tmp_path / "yard.farend"
    save(one_joint(), path)
    subprocess.run([sys.executable, "-c", CRASH, str(folder), str(path)], check=False)
    assert len(desk.document.recoverable()) == 1
    desk.document.close()
    (copy,) = other.document.recoverable()
    other.document.forget(copy)
    assert other.document.recoverable() == []
    assert list(folder.glob("*.farend")) == []


def test_a_copy_that_cannot_be_written_does_not_stop_the_work(qapp, tmp_path):
    blocked = tmp_path / "a file"
    blocked.write_text("in the way")
    desk = Desk(blocked)
    desk.draw()
    desk.document.keep_copy()
    assert desk.document.modified
    desk.document.close()
