"""The worker: the newest request wins, one thread at a time, none is lost at the end."""

from collections.abc import Callable, Iterator
from typing import Generic, TypeVar

from textual.dom import DOMNode
from textual.message import Message

Request = TypeVar("Request")


class Finished(Message):
    """A worker is ready for its next request."""

    bubble = False

    def __init__(self, worker: "LatestWins") -> None:  # type: ignore[type-arg]
        super().__init__()
        self.worker = worker


class LatestWins(Generic[Request]):
    """
    Answers requests in a thread; one that is overtaken by a newer one is never begun.

    Parameters
    ----------
    node
        The app or screen that gets the messages; its handler of `Finished` calls `finished`.
    answer
        Yields the messages that answer a request; between them it is asked whether somebody
        wants something newer. It must not raise.
    """

    def __init__(self, node: DOMNode, answer: Callable[[Request], Iterator[Message]]) -> None:
        self._node, self._answer = node, answer
        self._wanted: Request | None = None
        self.busy = False

    @property
    def overtaken(self) -> bool:
        """Whether something newer is waiting."""
        return self._wanted is not None

    def request(self, wanted: Request) -> None:
        """Ask; what was asked before and not yet begun is forgotten."""
        self._wanted = wanted
        if not self.busy:
            self._kick()

    def finished(self) -> None:
        """Go on with what was asked meanwhile."""
        self.busy = False
        self._kick()

    def _kick(self) -> None:
        if self._wanted is None:
            return
        wanted, self._wanted, self.busy = self._wanted, None, True
        self._node.run_worker(
            lambda: self._compute(wanted), thread=True, group="answers", exit_on_error=False
        )

    def _compute(self, wanted: Request) -> None:
        try:
            for message in self._answer(wanted):
                self._node.post_message(message)
                if self.overtaken:
                    break
        finally:
            self._node.post_message(Finished(self))
