"""The scheduler: the latest request wins, a running one is overtaken, nothing is left."""

import threading
import time

import pytest

from core.errors import InputError
from gui.scheduler import Job, Scheduler


@pytest.fixture
def scheduler(qtbot):
    made = Scheduler()
    yield made
    made.close()


def results_of(scheduler):
    results = []
    scheduler.finished.connect(
        lambda kind, request, result: results.append((kind, request, result))
    )
    return results


def double(request, ticker):
    ticker.tick(0.5)
    return 2 * request


def test_fifty_rapid_requests_give_one_result_the_last(scheduler, qtbot):
    results = results_of(scheduler)
    with qtbot.waitSignal(scheduler.idle, timeout=5000):
        for k in range(50):
            scheduler.submit(Job("extremes", k, double, "doubling"))
    assert results == [("extremes", 49, 98)]
    assert not scheduler.is_busy


def test_a_running_job_is_overtaken(scheduler, qtbot):
    results = results_of(scheduler)
    started = threading.Event()

    def endless(request, ticker):
        started.set()
        while True:
            ticker.tick(0.1)
            time.sleep(0.002)

    scheduler.submit(Job("extremes", "old", endless, "waiting"))
    qtbot.waitUntil(started.is_set, timeout=5000)
    with qtbot.waitSignal(scheduler.idle, timeout=5000):
        scheduler.submit(Job("extremes", 4, double, "doubling"))
    assert results == [("extremes", 4, 8)]


def test_jobs_of_different_kinds_do_not_supersede_each_other(scheduler, qtbot):
    results = results_of(scheduler)
    scheduler.submit(Job("one", 1, double, ""))
    scheduler.submit(Job("two", 2, double, ""))
    qtbot.waitUntil(lambda: len(results) == 2, timeout=5000)
    assert sorted(results) == [("one", 1, 2), ("two", 2, 4)]


def test_cancel_leaves_no_result(scheduler, qtbot):
    results = results_of(scheduler)
    started = threading.Event()

    def endless(request, ticker):
        started.set()
        while True:
            ticker.tick(0.1)
            time.sleep(0.002)

    scheduler.submit(Job("extremes", 1, endless, "waiting"))
    qtbot.waitUntil(started.is_set, timeout=5000)
    with qtbot.waitSignal(scheduler.idle, timeout=5000):
        scheduler.cancel()
    assert results == []
    assert not scheduler.is_busy


def test_progress_appears_only_after_a_while(scheduler, qtbot):
    seen = []
    scheduler.progress.connect(lambda words, fraction: seen.append((words, fraction)))

    def slow(request, ticker):
        for k in range(60):
            ticker.tick(k / 60)
            time.sleep(0.01)

    with qtbot.waitSignal(scheduler.idle, timeout=8000):
        scheduler.submit(Job("slow", 1, slow, "working"))
    assert seen
    assert all(words == "working" for words, _ in seen)
    assert seen[0][1] > 0.2


def test_an_error_of_the_user_is_said(scheduler, qtbot):
    def refuse(request, ticker):
        raise InputError("The table is singular.")

    with qtbot.waitSignal(scheduler.failed, timeout=5000) as failed:
        scheduler.submit(Job("extremes", 7, refuse, ""))
    assert failed.args == ["extremes", 7, "The table is singular."]


def test_close_joins_the_worker(qtbot):
    scheduler = Scheduler()
    before = threading.active_count()
    stopped = threading.Event()

    def endless(request, ticker):
        try:
            while True:
                ticker.tick(0.1)
                time.sleep(0.002)
        finally:
            stopped.set()

    scheduler.submit(Job("extremes", 1, endless, ""))
    qtbot.waitUntil(lambda: scheduler._running is not None, timeout=5000)
    scheduler.close()
    assert stopped.is_set()
    assert threading.active_count() <= before
