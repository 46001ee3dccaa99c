"""The draft beside a machine file, as one page sees it."""

from __future__ import annotations

from pathlib import Path

from splitcalc.machine.draft import Draft, drop, keep, kept


class Drafts:
    """`left` is what an earlier session left and nobody has answered yet.

    Until it is answered nothing is written over it; a draft of another page is never removed.
    Without a file there is none.
    """

    def __init__(self, path: Path | None) -> None:
        self._path = path
        self.left = None if path is None else kept(path)
        self._own = False  # whether the draft on disk is this page's

    def keep(self, draft: Draft | None) -> None:
        """Writes the draft; None: there is nothing that isn't saved.

        Raises
        ------
        SaveError : when it can't be written
        """
        if self._path is None or self.left is not None:
            return
        if draft is not None:
            keep(self._path, draft)
        elif self._own:
            drop(self._path)
        self._own = draft is not None

    def taken(self) -> None:
        """The page has taken over what was left."""
        self.left, self._own = None, True

    def dropped(self) -> None:
        """What was left is not wanted."""
        self.left = None
        if self._path is not None:
            drop(self._path)
