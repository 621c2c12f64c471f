"""The only place that starts computations: one worker, and the latest request wins.

Live quantities take a few milliseconds and run at once in the presenter. What takes longer goes
through `submit`: a request waits a short quiet gap, replaces the waiting one of its kind and
cancels the running one. A worker sees only its frozen request; results come back by signal.
"""

from __future__ import annotations

import itertools
import threading
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from PySide6.QtCore import QObject, QRunnable, QThreadPool, QTimer, Signal

from core.errors import InputError
from core.task import Cancelled, Ticker

QUIET_GAP_MS = 60
SHOW_PROGRESS_AFTER_MS = 300


@dataclass(frozen=True, eq=False)
class Job:
    """One request for long work.

    Attributes
    ----------
    kind : str
        Jobs of one kind supersede each other.
    request : object
        Frozen and hashable; handed to `run` on the worker.
    run : callable
        (request, Ticker) to the result. Must touch nothing but its arguments.
    words : str
        For the status line: "Extremes over all directions".
    """

    kind: str
    request: Any
    run: Callable[[Any, Ticker], Any]
    words: str


class Scheduler(QObject):
    """Runs jobs on one worker thread.

    Signals
    -------
    finished(kind, request, result), failed(kind, request, message)
        Only ever of the latest request of a kind.
    progress(words, fraction)
        Once a job has been running for a while.
    idle()
        Nothing runs and nothing waits.
    """

    finished = Signal(str, object, object)
    failed = Signal(str, object, str)
    progress = Signal(str, float)
    idle = Signal()
    _reported = Signal(int, float)
    _ended = Signal(int, object, object)

    def __init__(self, parent: QObject | None = None, force_sync: bool = False) -> None:
        super().__init__(parent)
        self._force_sync = force_sync
        self._serials = itertools.count(1)
        self._waiting: dict[str, Job] = {}
        self._running: tuple[int, Job, threading.Event] | None = None
        self._fraction = 0.0
        self._pool = QThreadPool(self)
        self._pool.setMaxThreadCount(1)
        self._gap = QTimer(self, singleShot=True, interval=QUIET_GAP_MS)
        self._gap.timeout.connect(self._start_next)
        self._patience = QTimer(self, singleShot=True, interval=SHOW_PROGRESS_AFTER_MS)
        self._patience.timeout.connect(self._on_patience)
        self._ended.connect(self._on_ended)
        self._reported.connect(self._on_reported)

    @property
    def is_busy(self) -> bool:
        """Whether anything runs or waits."""
        return self._running is not None or bool(self._waiting)

    def submit(self, job: Job) -> None:
        """Ask for a result; an older request of the same kind is dropped."""
        if self._force_sync:
            self._run_now(job)
            return
        self._waiting.pop(job.kind, None)
        self._waiting[job.kind] = job
        if self._running is not None and self._running[1].kind == job.kind:
            self._running[2].set()
        self._gap.start()

    def cancel(self) -> None:
        """Drop everything that waits and stop what runs; the last results stay."""
        self._waiting.clear()
        self._gap.stop()
        if self._running is not None:
            self._running[2].set()
        else:
            self.idle.emit()

    def close(self) -> None:
        """Cancel everything and wait until the worker has stopped."""
        self.cancel()
        self._patience.stop()
        self._pool.waitForDone(5000)
        self._running = None

    def _run_now(self, job: Job) -> None:
        try:
            self.finished.emit(job.kind, job.request, job.run(job.request, Ticker()))
        except InputError as error:
            self.failed.emit(job.kind, job.request, str(error))

    def _start_next(self) -> None:
        if self._running is not None or not self._waiting:
            return
        job = self._waiting.pop(next(iter(self._waiting)))
        serial, stop = next(self._serials), threading.Event()
        self._running, self._fraction = (serial, job, stop), 0.0
        self._patience.start()
        self._pool.start(_Worker(serial, job, stop, self._reported, self._ended))

    def _on_reported(self, serial: int, fraction: float) -> None:
        if self._running is not None and self._running[0] == serial:
            words, self._fraction = self._running[1].words, fraction
            if not self._patience.isActive():
                self.progress.emit(words, fraction)

    def _on_patience(self) -> None:
        if self._running is not None:
            self.progress.emit(self._running[1].words, self._fraction)

    def _on_ended(self, serial: int, result: object, error: object) -> None:
        if self._running is None or self._running[0] != serial:
            return
        _, job, stop = self._running
        self._running = None
        self._patience.stop()
        superseded = stop.is_set() or job.kind in self._waiting
        if self._waiting:
            self._start_next()
        else:
            self.idle.emit()
        if superseded or isinstance(error, Cancelled):
            return
        if isinstance(error, InputError):
            self.failed.emit(job.kind, job.request, str(error))
        elif isinstance(error, BaseException):
            raise error
        else:
            self.finished.emit(job.kind, job.request, result)


class _Worker(QRunnable):
    """Carries one job to the worker thread and speaks only through the scheduler's signals."""

    def __init__(
        self, serial: int, job: Job, stop: threading.Event, reported: Any, ended: Any
    ) -> None:
        super().__init__()
        self._serial, self._job, self._stop = serial, job, stop
        self._reported, self._ended = reported, ended

    def run(self) -> None:
        """Run the job and send its result or its error back."""
        ticker = Ticker(
            lambda fraction: self._reported.emit(self._serial, fraction), self._stop.is_set
        )
        result, error = None, None
        try:
            result = self._job.run(self._job.request, ticker)
        except Exception as caught:  # noqa: BLE001 - the boundary of the worker: sent on
            error = caught
        self._ended.emit(self._serial, result, error)
