"""Progress on a terminal; silence elsewhere."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from rich.console import Console
from rich.progress import BarColumn, Progress, TaskID, TextColumn

from ridercda.watch import NO_WATCH, Watch


class _Bar:
    def __init__(self, progress: Progress, task: TaskID) -> None:
        self._progress, self._task = progress, task

    def step(self, done: int, total: int) -> None:
        """Show how far the work is."""
        self._progress.update(self._task, completed=done, total=total)


@contextmanager
def progress_bar(console: Console, text: str) -> Iterator[Watch]:
    """Give a watch that draws a bar on a terminal and vanishes when done."""
    if not console.is_terminal:
        yield NO_WATCH
        return
    with Progress(TextColumn("{task.description}"), BarColumn(), console=console, transient=True) as progress:
        yield _Bar(progress, progress.add_task(text, total=None))
