"""Where the parts of the main-beam page stand; what they do is in `main_beam`."""

from __future__ import annotations

import html
from collections.abc import Callable, Mapping

from ipywidgets import HTML, Box, Button, Image, Layout, ToggleButtons, VBox, Widget

from splitcalc.draw.labels import HEIGHT, WIDTH
from splitcalc.sheet.style import ROW, STALE, STYLE, WAITING

VIEWS = ("stress", "actions", "equations")


class Page:
    """Rail of controls, sentence, picture with its moving texts, equations, section, bars."""

    def __init__(self, *, pin: Button, worst: list[Button], open_points: str) -> None:
        size = Layout(width=f"{WIDTH}px", height=f"{HEIGHT}px")
        self.image = Image(format="png", width=WIDTH, height=HEIGHT, layout=size)
        self.labels = named(HTML(), "labels")
        self.stage = named(Box([self.image, self.labels]), "stage")
        self.equations = named(HTML(), "equations")
        self.view = named(ToggleButtons(options=VIEWS, tooltips=VIEW_WORDS), "choice")
        self.past = named(HTML(), "past")
        self.sentence = named(HTML(), "sentence")
        self.section, self.bars, self.foot = HTML(), HTML(), HTML()
        self.names = named(VBox(), "names")
        self.rail = named(VBox(), "rail")
        self.message = named(HTML(), "message")
        self.unsaved_line = named(HTML(), "message")
        checks = named(Box([self.names, self.bars]), "checks")
        section = VBox([heading("section, where it governs"), self.section])
        used = [heading("used of the limit"), checks, row(*worst), row(pin)]
        side = [section, VBox([*used, HTML(small(open_points))])]
        view = named(Box([self.view, self.past]), "view")
        body = named(
            Box(
                [
                    self.rail,
                    self.sentence,
                    named(VBox([view, self.stage, self.equations]), "middle"),
                    named(Box(side), "side"),
                ]
            ),
            "body",
        )
        self.box = named(VBox([HTML(STYLE), body, self.foot]), "page")

    def show_view(self, view: str) -> None:
        """The picture, or the equations in its place."""
        picture = view != "equations"
        self.stage.layout.display = None if picture else "none"
        self.equations.layout.display = "none" if picture else None

    def stale(self, is_stale: bool) -> None:
        """Greys what does not show what the controls say."""
        (self.box.add_class if is_stale else self.box.remove_class)(STALE)

    def waiting(self, is_waiting: bool) -> None:
        """Pales what belongs to the machine before its last change."""
        (self.box.add_class if is_waiting else self.box.remove_class)(WAITING)

    def name_checks(self, buttons: Mapping[str, Button], chosen: str) -> None:
        """A button beside each bar, by the check's id."""
        for check_id, name in buttons.items():
            name.layout = Layout(height=f"{ROW}px")
            if check_id == chosen:
                name.add_class("splitcalc-chosen")
        self.names.children = list(buttons.values())

    def unsaved(self, changes: str) -> None:
        """What the controls have changed and the machine file doesn't know yet."""
        self.unsaved_line.value = small(f"Not saved: {changes}") if changes else ""

    def say(self, text: str, bad: bool = False) -> None:
        """A sentence under the buttons."""
        kind = " class='splitcalc-error'" if bad else ""
        self.message.value = f"<div{kind}>{html.escape(text)}</div>" if text else ""


VIEW_WORDS = (
    "stress along the beam",
    "forces and moments along the beam",
    "how the chosen check is computed, with the numbers of this log",
)


def named(widget: Widget, name: str) -> Widget:
    """The widget with a class of the style sheet."""
    widget.add_class(f"splitcalc-{name}")
    return widget


def heading(text: str) -> HTML:
    return HTML(f"<h4>{html.escape(text)}</h4>")


def row(*children: Widget) -> Box:
    return named(Box(children), "buttons")


def small(text: str) -> str:
    return f"<div style='font-size:85%;opacity:0.8'>{html.escape(text)}</div>"


def button(text: str, tooltip: str, action: Callable[[], None]) -> Button:
    out = Button(description=text, tooltip=tooltip)
    out.on_click(lambda _: action())
    return out
