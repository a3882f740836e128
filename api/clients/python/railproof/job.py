"""Long work: a job with its progress."""

import sys
import time
from typing import TYPE_CHECKING, Any, Callable, Optional, TextIO

from .contract import Job
from .problem import ProblemError

if TYPE_CHECKING:
    from .client import Client

POLL_S = 0.5
"""Seconds between two looks at a job."""


class JobNotDoneError(Exception):
    """The job was cancelled, or did not end within the time given."""


class ProgressLine:
    """Shows progress on one line, only on a terminal or in a notebook."""

    def __init__(self, stream: Optional[TextIO] = None) -> None:
        self._stream = stream or sys.stderr
        self._shown = self._stream.isatty() or "ipykernel" in sys.modules
        self._width = 0

    def show(self, job: Job) -> None:
        """Replaces the line by the state of the job."""
        if not self._shown:
            return
        progress = job["progress"]
        done = progress["fraction_ratio"]
        bar = "=" * round(20 * done)
        text = f"{job['operation']} [{bar:<20}] {100 * done:3.0f} % {job['state']}"
        if samples := progress.get("samples"):
            text += f", {samples:,} evaluations"
        if (remaining := progress.get("remaining_s")) is not None and job["state"] == "running":
            text += f", {remaining:.0f} s left"
        self._stream.write("\r" + text.ljust(self._width))
        self._stream.flush()
        self._width = len(text)

    def end(self) -> None:
        """Leaves the line."""
        if self._width:
            self._stream.write("\n")
            self._stream.flush()


class RunningJob:
    """A job of the server."""

    def __init__(self, client: "Client", job: Job) -> None:
        self._client = client
        self.state: Job = job

    @property
    def id(self) -> str:
        return self.state["id"]

    def refresh(self) -> Job:
        """Asks for state and progress."""
        self.state = self._client.get_job(self.id)
        return self.state

    def cancel(self) -> Job:
        """Cancels the job."""
        self.state = self._client.cancel_job(self.id)
        return self.state

    def wait(self, timeout_s: Optional[float] = None, on_progress: Optional[Callable[[Job], None]] = None) -> Any:
        """Waits for the job and returns its answer.

        Progress is shown on standard error where that is a terminal or a notebook;
        with on_progress it is handed there instead. A job that failed raises its
        problem. When the wait ends early, the job goes on.
        """
        line = ProgressLine()
        end = None if timeout_s is None else time.monotonic() + timeout_s
        try:
            while True:
                job = self.refresh()
                (on_progress or line.show)(job)
                if job["state"] == "done":
                    return self._client.result(job["result_id"])
                if job["state"] == "failed":
                    raise ProblemError(job["problem"])
                if job["state"] == "cancelled":
                    raise JobNotDoneError(f"job {self.id} was cancelled")
                if end is not None and time.monotonic() > end:
                    raise JobNotDoneError(f"job {self.id} is {job['state']} after {timeout_s} s")
                time.sleep(POLL_S)
        finally:
            line.end()

    def __repr__(self) -> str:
        return f"<RunningJob {self.id} {self.state['operation']} {self.state['state']} {100 * self.state['progress']['fraction_ratio']:.0f} %>"
