"""Progress and cancelling for long loops. No threads live here."""

from collections.abc import Callable


class Cancelled(Exception):  # noqa: N818 - a request that was obeyed, not an error
    """The user, or a newer request, asked the running job to stop."""


class Ticker:
    """What a long loop talks to: it reports a fraction and learns whether to stop.

    Parameters
    ----------
    report : callable
        Receives the fraction done, 0 to 1.
    is_cancelled : callable
        Returns True once the job should stop.
    """

    def __init__(
        self,
        report: Callable[[float], None] = lambda fraction: None,
        is_cancelled: Callable[[], bool] = lambda: False,
    ) -> None:
        self._report = report
        self._is_cancelled = is_cancelled

    def tick(self, fraction: float) -> None:
        """Report the fraction done; raise `Cancelled` if the job should stop."""
        if self._is_cancelled():
            raise Cancelled
        self._report(min(max(fraction, 0.0), 1.0))
