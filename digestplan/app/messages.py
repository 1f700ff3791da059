"""What travels between threads, widgets and screens."""

from textual.message import Message

from digestplan.app.answer import Answer
from digestplan.app.form import Cell


class Answered(Message):
    """An answer to a plan's text; ``rough`` where a finer one is to follow."""

    def __init__(self, answer: Answer, *, rough: bool = False) -> None:
        super().__init__()
        self.answer, self.rough = answer, rough


class Edited(Message):
    """Somebody typed into a field."""

    def __init__(self, cell: Cell, typed: str) -> None:
        super().__init__()
        self.cell, self.typed = cell, typed


class Looked(Message):
    """The focus has gone to a field."""

    def __init__(self, cell: Cell) -> None:
        super().__init__()
        self.cell = cell
