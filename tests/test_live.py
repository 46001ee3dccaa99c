import asyncio
import itertools
import sys
from collections.abc import Callable, Coroutine, Generator
from threading import Thread
from typing import Any

import pytest
from ipywidgets import FloatSlider

from splitcalc.sheet import live as module
from splitcalc.sheet.live import Live


class Page:
    """One slider, what was drawn for it, and the errors that were shown."""

    def __init__(self, update: Callable[[float], None] = lambda offset: None) -> None:
        self.control = FloatSlider(value=0.0, min=0.0, max=100.0)
        self.drawn: list[float] = []
        self.errors: list[str] = []
        self.more = update
        self.live = Live(
            {"offset": self.control}, self.update, lambda error: self.errors.append(str(error))
        )

    def update(self, values: dict[str, Any]) -> None:
        self.drawn.append(values["offset"])
        self.more(values["offset"])


def run(main: Coroutine[Any, Any, None]) -> None:
    """Runs it in a loop; the time limit only ends a wait that would never end."""
    asyncio.run(asyncio.wait_for(main, timeout=30))


async def until(condition: Callable[[], object]) -> None:
    while not condition():
        await asyncio.sleep(0)


def reraise(error: Exception) -> None:
    raise error


def fail(offset: float) -> None:
    if offset > 50.0:
        raise ZeroDivisionError(f"no lever arm at {offset}")


# Where no loop runs


def test_each_change_is_drawn_at_once() -> None:
    page = Page()
    for offset in (1.0, 2.0, 3.0):
        page.control.value = offset
        assert page.drawn[-1] == offset
    assert page.drawn == [1.0, 2.0, 3.0]


def test_first_picture_comes_when_asked_for() -> None:
    page = Page()
    assert page.drawn == []
    page.live.draw()
    assert page.drawn == [0.0]


def test_update_gets_the_values_of_all_controls() -> None:
    got: list[dict[str, float]] = []
    controls = {"offset": FloatSlider(value=1.0), "angle": FloatSlider(value=2.0)}
    Live(controls, got.append, reraise)
    controls["angle"].value = 3.0
    assert got == [{"offset": 1.0, "angle": 3.0}]


def test_error_is_shown_and_the_next_value_drawn() -> None:
    page = Page(fail)
    page.control.value = 60.0
    assert page.errors == ["no lever arm at 60.0"]
    page.control.value = 40.0
    assert page.drawn == [60.0, 40.0]
    assert len(page.errors) == 1


def test_update_that_changes_a_control_draws_the_changed_value_last() -> None:
    finished: list[float] = []

    def bound(offset: float) -> None:
        if offset > 50.0:
            page.control.value = 50.0
        finished.append(offset)

    page = Page(bound)
    page.control.value = 60.0
    assert finished == [60.0, 50.0]


def test_update_that_changes_a_control_has_its_slices_dropped() -> None:
    steps: list[float] = []

    def bound(offset: float) -> None:
        page.control.value = min(offset, 50.0)
        page.live.run_slices(steps.append(offset) for _ in range(2))

    page = Page(bound)
    page.control.value = 60.0
    assert steps == [50.0, 50.0]


def test_slices_run_to_the_end() -> None:
    steps: list[int] = []
    page = Page(lambda offset: page.live.run_slices(steps.append(k) for k in range(5)))
    page.live.draw()
    assert steps == [0, 1, 2, 3, 4]


def test_changes_in_two_threads_are_drawn_one_at_a_time() -> None:
    # JupyterLab hands changes over in another thread than the cells'.
    controls = {"a": FloatSlider(max=100.0), "b": FloatSlider(max=100.0)}
    last: dict[str, float] = {}
    inside: list[str] = []
    wrong: list[str] = []

    def update(values: dict[str, float]) -> None:
        inside.append("here")
        if len(inside) > 1:
            wrong.append("two updates at a time")
        sum(range(2000))
        last.update(values)
        inside.pop()

    def turn(name: str) -> None:
        for n in range(1, 101):
            controls[name].value = n
            if last[name] != n:
                wrong.append(f"{name} = {n} was not drawn")

    live = Live(controls, update, lambda error: wrong.append(repr(error)))
    live.draw()
    interval = sys.getswitchinterval()
    sys.setswitchinterval(1e-6)
    try:
        threads = [Thread(target=turn, args=[name]) for name in controls]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
    finally:
        sys.setswitchinterval(interval)
    assert wrong == []


# In a running loop


def test_twenty_changes_in_one_go_lead_to_one_update() -> None:
    async def main() -> None:
        page = Page()
        for offset in range(1, 21):
            page.control.value = offset
        assert page.drawn == []
        await until(lambda: page.drawn)
        page.control.value = 30.0
        await until(lambda: page.drawn[-1] == 30.0)
        assert page.drawn == [20.0, 30.0]

    run(main())


def test_changes_that_wait_in_a_queue_are_not_drawn_one_by_one(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(module, "PAUSE", 0.2)  # far above the time that these turns take

    async def main() -> None:
        page = Page()
        for offset in range(1, 21):
            for _ in range(5):  # a message takes some turns of the loop to come through
                await asyncio.sleep(0)
            page.control.value = offset
        await until(lambda: page.drawn and page.drawn[-1] == 20.0)
        assert len(page.drawn) <= 2

    run(main())


def test_only_the_call_for_the_newest_change_draws(monkeypatch: pytest.MonkeyPatch) -> None:
    calls: list[Callable[[], None]] = []

    class Loop:
        def call_later(self, delay: float, call: Callable[..., None], *arguments: object) -> None:
            calls.append(lambda: call(*arguments))

    monkeypatch.setattr(module, "_running_loop", Loop)
    page = Page()
    page.control.value = 1.0
    page.control.value = 2.0
    first, second = calls
    first()
    assert page.drawn == []  # more may still wait behind the second change
    second()
    assert page.drawn == [2.0]


def test_change_during_an_update_is_drawn_after_it() -> None:
    async def main() -> None:
        page = Page(lambda offset: setattr(page.control, "value", 2.0))
        page.control.value = 1.0
        await until(lambda: len(page.drawn) == 2)
        assert page.drawn == [1.0, 2.0]

    run(main())


def test_error_in_the_loop_is_shown() -> None:
    async def main() -> None:
        page = Page(fail)
        page.control.value = 60.0
        await until(lambda: page.errors)
        assert page.errors == ["no lever arm at 60.0"]

    run(main())


def test_closed_wiring_draws_nothing_more() -> None:
    async def main() -> None:
        page = Page()
        page.control.value = 1.0
        page.live.close()
        page.control.value = 2.0
        later: list[dict[str, Any]] = []
        Live({"offset": page.control}, later.append, reraise)
        page.control.value = 3.0
        await until(lambda: later)  # its turn comes after those of the closed one
        assert page.drawn == []

    run(main())


def test_new_value_drops_the_slices_of_the_old_one(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module, "SLICE", 0.0)
    log: list[tuple[str, float]] = []
    works: list[Generator[None, None, None]] = []  # kept: only an explicit close ends one early

    def long_work(offset: float) -> Generator[None, None, None]:
        try:
            for _ in range(1000):
                log.append(("step", offset))
                yield
        finally:
            log.append(("closed", offset))

    def update(offset: float) -> None:
        works.append(long_work(offset))
        page.live.run_slices(works[-1])

    page = Page(update)

    async def main() -> None:
        page.control.value = 1.0
        await until(lambda: log.count(("step", 1.0)) >= 3)
        page.control.value = 2.0
        steps = log.count(("step", 1.0))
        await until(lambda: ("step", 2.0) in log)
        assert steps < 1000
        assert log.count(("step", 1.0)) == steps
        assert ("closed", 1.0) in log
        assert page.errors == []
        page.live.close()

    run(main())


def test_loop_has_its_turn_after_each_slice(monkeypatch: pytest.MonkeyPatch) -> None:
    clock = itertools.count(step=0.004)  # each look at it finds 4 ms gone, so a slice is 3 steps
    monkeypatch.setattr(module, "perf_counter", lambda: next(clock))
    log: list[str] = []

    async def main() -> None:
        page = Page(lambda offset: page.live.run_slices(log.append("step") for _ in range(30)))
        page.live.draw()
        while log.count("step") < 30:
            log.append("turn")
            await asyncio.sleep(0)

    run(main())
    slices = [len(list(group)) for what, group in itertools.groupby(log) if what == "step"]
    assert slices == [3] * 10


@pytest.mark.parametrize("loop_runs", [True, False])
def test_error_in_a_slice_is_shown(loop_runs: bool) -> None:
    def work() -> Generator[None, None, None]:
        yield
        raise ZeroDivisionError("no log is allowed")

    page = Page(lambda offset: page.live.run_slices(work()))

    async def main() -> None:
        page.live.draw()
        await until(lambda: page.errors)

    if loop_runs:
        run(main())
    else:
        page.live.draw()
    assert page.errors == ["no log is allowed"]


def test_changes_made_together_are_drawn_once() -> None:
    page = Page()
    with page.live.together():
        page.control.value = 1.0
        page.control.value = 2.0
        assert page.drawn == []
    assert page.drawn == [2.0]


def test_what_a_button_does_wrong_is_shown() -> None:
    page = Page()
    page.live.guard(fail, 60.0)
    assert page.errors == ["no lever arm at 60.0"]


def test_work_rests_as_long_as_it_asks_for_and_a_change_ends_the_rest() -> None:
    page, done = Page(), []

    def work() -> Generator[float | None, None, None]:
        yield None
        done.append("before")
        yield 3600.0
        done.append("after an hour")

    async def main() -> None:
        page.live.run_slices(work())
        await until(lambda: done)
        page.control.value = 1.0
        await until(lambda: page.drawn)
        for _ in range(100):
            await asyncio.sleep(0)

    run(main())
    assert done == ["before"]
    page.live.run_slices(work())  # where no loop runs, nobody waits
    assert done == ["before", "before", "after an hour"]
