"""Keeps a picture with its controls: the newest values are drawn, stale ones are left out."""

import asyncio
from collections.abc import Callable, Generator, Iterator, Mapping
from contextlib import contextmanager
from threading import RLock
from time import perf_counter
from typing import Any

# Changes that wait in the kernel's queue are let in before anything is drawn. Giving the loop one
# turn (call_soon) is too little: a message takes several turns from the socket to its widget, and
# each of 20 waiting ones was drawn. A message comes through well within this time.
PAUSE = 0.002  # seconds
SLICE = 0.010  # seconds of background work between two pauses

Work = Generator[float | None, None, None]

_DONE = object()


class Live:
    """Calls `update` with the values of all `controls`, by name, after any of them changed.

    A control is a widget, or anything else with a trait `value`.

    Inside a running asyncio loop, as in a notebook's kernel, changes that come together lead to
    one update with the newest values. Where no loop runs (a test, a script) each is drawn at once.
    An update that changes a control itself is followed by another one.

    An exception in `update`, or in work it hands to `run_slices`, goes to `on_error`, whose part
    is to show it in the page: from a callback, nobody would see it.

    Make it together with its controls, and `close` it before they are replaced.
    """

    def __init__(
        self,
        controls: Mapping[str, Any],
        update: Callable[[dict[str, Any]], None],
        on_error: Callable[[Exception], None],
    ) -> None:
        self._controls = dict(controls)
        self._update = update
        self._on_error = on_error
        self._pending: object | None = None  # stands for the one change that is not drawn yet
        self._work: Work | None = None
        self._drawing = False
        self._held = False
        # JupyterLab hands a widget's changes to a thread beside the one that runs the cells.
        self._lock = RLock()
        for control in self._controls.values():
            control.observe(self._changed, "value")

    def draw(self) -> None:
        """Updates now, not when the loop is free: for the first picture."""
        self._mark_change()
        self._draw_pending()

    @contextmanager
    def together(self) -> Iterator[None]:
        """Changes made inside lead to one update, also where no loop runs."""
        self._held = True
        try:
            yield
        finally:
            self._held = False
        self._changed(None)

    def guard(self, action: Callable[..., None], *arguments: object) -> None:
        """Runs what a button does; an exception goes to `on_error`."""
        try:
            action(*arguments)
        except Exception as error:  # of any kind: unseen, it would leave a stale picture
            self._on_error(error)

    def run_slices(self, work: Work) -> None:
        """Runs slow work to its end, in place of what ran before, between the person's changes.

        Inside a running loop it is resumed in slices of 10 ms, so from one yield to the next it
        should take a few milliseconds at most; work that yields a number rests so many seconds.
        The next change of a control drops it (closes it). Where no loop runs it runs to its end
        before this returns, without a rest.
        """
        # An update that changed a control hands over work that is stale already.
        self._work = work if self._pending is None else None
        self._resume_soon(work)

    def close(self) -> None:
        """Leaves the controls alone from now on; what still waits is not drawn."""
        for control in self._controls.values():
            control.unobserve(self._changed, "value")
        self._pending = self._work = None

    def _changed(self, _: object) -> None:
        if self._held:
            return
        change = self._mark_change()
        loop = _running_loop()
        if loop is None:
            self._draw_pending()
        else:
            loop.call_later(PAUSE, self._draw_if_newest, change)

    def _mark_change(self) -> object:
        self._work = None
        self._pending = change = object()
        return change

    def _draw_if_newest(self, change: object) -> None:
        if change is self._pending:
            self._draw_pending()

    def _draw_pending(self) -> None:
        with self._lock:
            if self._drawing:
                return  # called from within an update, after which the loop below goes on
            self._drawing = True
            try:
                while self._pending is not None:
                    self._pending = None
                    values = {name: control.value for name, control in self._controls.items()}
                    self.guard(self._update, values)
            finally:
                self._drawing = False

    def _resume_soon(self, work: Work, rest: float = PAUSE) -> None:
        loop = _running_loop()
        if loop is None:
            self._resume(work)
        else:
            loop.call_later(rest, self._resume, work)

    def _resume(self, work: Work) -> None:
        with self._lock:
            self.guard(self._advance, work)

    def _advance(self, work: Work) -> None:
        awake = _running_loop() is None
        end = perf_counter() + SLICE
        while work is self._work and (rest := next(work, _DONE)) is not _DONE:
            if not awake and (rest or perf_counter() >= end):
                self._resume_soon(work, max(PAUSE, rest or 0.0))  # type: ignore[call-overload]
                return
        work.close()


def _running_loop() -> asyncio.AbstractEventLoop | None:
    try:
        return asyncio.get_running_loop()
    except RuntimeError:
        return None
