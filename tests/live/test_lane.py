"""The lane and its pace, without Qt."""

from threading import Event, active_count

import pytest

from app.live.lane import Job, Lane, Pace


def test_one_hiccup_does_not_make_the_pace_slow_but_two_slow_jobs_do():
    pace = Pace(frame_s=0.01)
    pace.note(0.5)
    assert not pace.slow
    pace.note(0.5)
    assert pace.slow
    pace.note(0.001)
    assert not pace.slow


def test_the_lane_takes_one_job_at_a_time_and_leaves_no_thread():
    before, gate, told = active_count(), Event(), []
    lane = Lane(told.append)
    job = Job("", 1, lambda: gate.wait(5))
    lane.start(job)
    with pytest.raises(RuntimeError, match="taken"):
        lane.start(Job("", 2, lambda: None))
    gate.set()
    assert lane.land() is job
    assert job.answer() is True
    assert told == [job]
    assert lane.flight is None
    assert active_count() == before


def test_nothing_is_told_after_closing():
    gate, told = Event(), []
    lane = Lane(told.append)
    lane.start(Job("", 1, lambda: gate.wait(0.05)))
    lane.close()
    assert told == []


def test_an_error_of_the_work_is_raised_where_the_answer_is_taken():
    job = Job("", 1, lambda: 1 / 0)
    job.run()
    with pytest.raises(ZeroDivisionError):
        job.answer()
