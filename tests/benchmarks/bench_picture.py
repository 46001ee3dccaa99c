"""Times one step of a slider: a new figure, saved the stock way, against the kept canvas.

Run it as a script. Both draw the same three panels with the same function, in turn, so that a
busy machine slows both; read the ratios, not the milliseconds.
"""

import io
from collections.abc import Callable
from time import perf_counter

import numpy as np
from matplotlib.artist import Artist
from matplotlib.figure import Figure

from splitcalc.draw.canvas import CSS_DPI, Canvas

WIDTH, HEIGHT = 900, 620  # css pixels
STEPS = 60
X = np.linspace(0.0, 1.2, 200)
CHECKS = [f"check {k}" for k in range(6)]


def draw_panels(figure: Figure) -> list[Artist]:
    """A panel of 4 stress curves, one of 4 deflections, one of 6 utilisations; what moves."""
    panels = figure.subplots(3, 1)
    titles = ["Stress (MPa)", "Deflection (mm)", "Utilisation"]
    for panel, title in zip(panels, titles, strict=True):
        panel.set_title(title)
    moving: list[Artist] = []
    for panel in panels[:2]:
        panel.set(xlim=(0.0, 1.2), ylim=(-5.0, 5.0), xlabel="Place along the beam (m)")
        moving += [panel.plot(X, X)[0] for _ in range(4)]
    panels[2].set_xlim(0.0, 2.5)
    return [*moving, *panels[2].barh(CHECKS, np.ones(6))]


def move(moving: list[Artist], offset: float) -> None:
    for k, line in enumerate(moving[:8]):
        line.set_ydata((1 + k % 4) * np.sin(4 * X + k + offset))
    for k, bar in enumerate(moving[8:]):
        bar.set_width(1.2 + np.sin(k + offset))


def stock(offset: float) -> bytes:
    size = (WIDTH / CSS_DPI, HEIGHT / CSS_DPI)
    figure = Figure(figsize=size, dpi=CSS_DPI, layout="constrained")
    move(draw_panels(figure), offset)
    file = io.BytesIO()
    figure.savefig(file)
    return file.getvalue()


def kept(scale: int) -> Callable[[float], bytes]:
    canvas = Canvas(WIDTH, HEIGHT, scale)
    moving = draw_panels(canvas.figure)
    canvas.moving(*moving)

    def step(offset: float) -> bytes:
        move(moving, offset)
        return canvas.render({"offset": offset})

    return step


def main() -> None:
    ways = {"new figure, savefig": stock, "canvas at 1x": kept(1), "canvas at 2x": kept(2)}
    times: dict[str, list[float]] = {name: [] for name in ways}
    sizes = {name: len(way(0.0)) for name, way in ways.items()}  # also warms fonts and background
    for offset in np.linspace(0.0, 6.0, STEPS):
        for name, way in ways.items():
            start = perf_counter()
            way(float(offset))
            times[name].append(1000 * (perf_counter() - start))

    reference = np.median(times["new figure, savefig"])
    print(f"{WIDTH} x {HEIGHT} css pixels, {STEPS} steps")
    print(f"{'':20} {'median ms':>10} {'p95 ms':>8} {'kB':>6} {'times as quick':>15}")
    for name, ms in times.items():
        median, p95 = np.median(ms), np.percentile(ms, 95)
        kilobytes = sizes[name] / 1000
        print(f"{name:20} {median:10.1f} {p95:8.1f} {kilobytes:6.0f} {reference / median:15.1f}")


if __name__ == "__main__":
    main()
