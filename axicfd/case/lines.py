"""The line of every key, table and list entry of a TOML text.

The text has been accepted by the parser before, so this walks it without judging it: it only has to know
where strings, comments, lists and inline tables begin and end.
"""

from __future__ import annotations

import re

_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_SCALAR = re.compile(r"[^,\]}#\n]*")


def lines_of(text: str) -> dict[tuple[str | int, ...], int]:
    """Way to a value -> its line, counted from 1; a table has its header's line, a list entry its own."""
    return _Walk(text).lines


class _Walk:
    def __init__(self, text: str) -> None:
        self.text = text.replace("\r\n", "\n")
        self.place = 0
        self.line = 1
        self.lines: dict[tuple[str | int, ...], int] = {}
        self.counts: dict[tuple[str | int, ...], int] = {}  # entries so far of each list of tables
        self._document()

    # ------------------------------------------------------------------ moving

    def _here(self, ahead: str) -> bool:
        return self.text.startswith(ahead, self.place)

    def _step(self, count: int) -> str:
        taken = self.text[self.place : self.place + count]
        self.line += taken.count("\n")
        self.place += count
        return taken

    def _blank(self, lines: bool) -> None:
        """Pass spaces, and, if `lines`, comments and line ends too."""
        while self.place < len(self.text):
            mark = self.text[self.place]
            if mark in " \t" or (lines and mark == "\n"):
                self._step(1)
            elif lines and mark == "#":
                end = self.text.find("\n", self.place)
                self._step((end if end >= 0 else len(self.text)) - self.place)
            else:
                return

    # ------------------------------------------------------------------ reading

    def _document(self) -> None:
        table: tuple[str | int, ...] = ()
        while True:
            self._blank(lines=True)
            if self.place >= len(self.text):
                return
            line, before = self.line, self.place
            if self._here("[["):
                self._step(2)
                names = self._dotted()
                self._step(2)
                head = self._resolved(names[:-1]) + (names[-1],)
                self.lines.setdefault(head, line)
                self.counts[head] = self.counts.get(head, -1) + 1
                table = (*head, self.counts[head])
                self.lines[table] = line
            elif self._here("["):
                self._step(1)
                names = self._dotted()
                self._step(1)
                table = self._resolved(names)
                self._note(table, line)
            else:
                self._pair(table)
            if self.place == before:  # text the parser would not have accepted: give up rather than hang
                return

    def _resolved(self, names: list[str]) -> tuple[str | int, ...]:
        """A header's names with the index of the latest entry after each list of tables."""
        way: tuple[str | int, ...] = ()
        for name in names:
            way = (*way, name)
            if way in self.counts:
                way = (*way, self.counts[way])
        return way

    def _note(self, way: tuple[str | int, ...], line: int) -> None:
        """Keep the line of a place and of the tables it implies."""
        for length in range(1, len(way)):
            self.lines.setdefault(way[:length], line)
        self.lines[way] = line

    def _pair(self, table: tuple[str | int, ...]) -> None:
        line = self.line
        way = (*table, *self._dotted())
        self._note(way, line)
        self._blank(lines=False)
        self._step(1)  # =
        self._value(way)

    def _dotted(self) -> list[str]:
        names = []
        while True:
            self._blank(lines=False)
            if self.place < len(self.text) and self.text[self.place] in "\"'":
                names.append(self._string())
            else:
                found = _BARE_KEY.match(self.text, self.place)
                names.append(self._step(len(found.group())) if found else "")
            self._blank(lines=False)
            if not self._here("."):
                return names
            self._step(1)

    def _value(self, way: tuple[str | int, ...]) -> None:
        self._blank(lines=False)
        if self._here("["):
            self._list(way)
        elif self._here("{"):
            self._inline_table(way)
        elif self._here('"') or self._here("'"):
            self._string()
        else:
            found = _SCALAR.match(self.text, self.place)
            self._step(len(found.group()) if found else 1)

    def _list(self, way: tuple[str | int, ...]) -> None:
        self._step(1)
        count = 0
        while True:
            self._blank(lines=True)
            if self.place >= len(self.text):
                return
            if self._here("]"):
                self._step(1)
                return
            if self._here(","):
                self._step(1)
                continue
            before = self.place
            self.lines[(*way, count)] = self.line
            self._value((*way, count))
            count += 1
            if self.place == before:
                return

    def _inline_table(self, way: tuple[str | int, ...]) -> None:
        self._step(1)
        while True:
            self._blank(lines=True)
            if self.place >= len(self.text):
                return
            if self._here("}"):
                self._step(1)
                return
            if self._here(","):
                self._step(1)
                continue
            before = self.place
            self._pair(way)
            if self.place == before:
                return

    def _string(self) -> str:
        """Pass a string of any of the four kinds; its text, with only the escapes of quotes resolved."""
        mark = self.text[self.place]
        fence = mark * 3 if self._here(mark * 3) else mark
        self._step(len(fence))
        start = self.place
        while self.place < len(self.text) and not self._here(fence):
            self._step(2 if mark == '"' and self._here("\\") else 1)
        while len(fence) == 3 and self._here(mark * 4):  # a quote may stand right before the closing three
            self._step(1)
        inside = self.text[start : self.place]
        self._step(len(fence))
        return inside.replace('\\"', '"').replace("\\\\", "\\") if mark == '"' else inside
