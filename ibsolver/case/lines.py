"""Which line of a TOML text does each key stand on? The standard parser does not tell.

The scanner walks a text that the standard parser has already accepted, follows tables, arrays of tables, dotted
keys, inline tables and arrays, and notes a line for every path. It never raises: where a text confuses it, it
returns what it has, and faults then carry the line of the nearest parent.
"""

from __future__ import annotations

import tomllib

Path = tuple[str | int, ...]

_BLANK = " \t"
_SPACE = " \t\r\n"


class _Confused(Exception):
    """The text is not the TOML that the scanner expects; caught in `scan_lines`."""


def scan_lines(text: str) -> dict[Path, int]:
    """Return the line (from 1) of every path of a TOML text.

    Examples
    --------
    >>> scan_lines('a = 1\\n[[flap]]\\nname = "x"\\n')[("flap", 0, "name")]
    3
    """
    scanner = _Scanner(text)
    try:
        scanner.document()
    except (_Confused, RecursionError):
        pass
    return scanner.lines


def line_of(lines: dict[Path, int], path: Path) -> int:
    """Return the line of `path`, or of its nearest parent; 0 where none is known."""
    while path:
        if path in lines:
            return lines[path]
        path = path[:-1]
    return 0


class _Scanner:
    """Cursor over the text. `counts` holds how many elements each array of tables has so far."""

    def __init__(self, text: str):
        self.text = text
        self.at = 0
        self.line = 1
        self.lines: dict[Path, int] = {}
        self.counts: dict[Path, int] = {}

    def document(self) -> None:
        table: Path = ()
        while self.skip(_SPACE):
            if self.text.startswith("[[", self.at):
                table = self.header(array=True)
            elif self.text[self.at] == "[":
                table = self.header(array=False)
            else:
                self.pair(table)

    def skip(self, blanks: str) -> bool:
        """Move over blanks and comments; return whether anything is left."""
        while self.at < len(self.text):
            character = self.text[self.at]
            if character == "#":
                end = self.text.find("\n", self.at)
                self.at = len(self.text) if end < 0 else end
            elif character in blanks:
                self.advance(1)
            else:
                return True
        return False

    def advance(self, count: int) -> None:
        self.line += self.text.count("\n", self.at, self.at + count)
        self.at += count

    def expect(self, token: str) -> None:
        if not self.text.startswith(token, self.at):
            raise _Confused
        self.advance(len(token))

    def header(self, array: bool) -> Path:
        line = self.line
        self.expect("[[" if array else "[")
        path = self.resolve(self.dotted(), array)
        self.expect("]]" if array else "]")
        self.note(path, line)
        return path

    def resolve(self, names: tuple[str, ...], array: bool) -> Path:
        """Return the path of a header, with the index of the newest element after each array of tables."""
        path: Path = ()
        for position, name in enumerate(names):
            path += (name,)
            if array and position == len(names) - 1:
                self.counts[path] = self.counts.get(path, 0) + 1
            if path in self.counts:
                path += (self.counts[path] - 1,)
        return path

    def note(self, path: Path, line: int) -> None:
        while path and path not in self.lines:
            self.lines[path] = line
            path = path[:-1]

    def dotted(self) -> tuple[str, ...]:
        names = []
        while True:
            self.skip(_BLANK)
            names.append(self.name())
            self.skip(_BLANK)
            if not self.text.startswith(".", self.at):
                return tuple(names)
            self.advance(1)

    def name(self) -> str:
        start = self.at
        if self.at < len(self.text) and self.text[self.at] in "\"'":
            self.string()
            quoted = self.text[start + 1 : self.at - 1]
            return _unescape(quoted) if self.text[start] == '"' else quoted
        while self.at < len(self.text) and self.text[self.at] not in " \t\r\n.=]#[{},\"'":
            self.at += 1
        if self.at == start:
            raise _Confused
        return self.text[start : self.at]

    def pair(self, table: Path) -> None:
        line = self.line
        path = table + self.dotted()
        self.note(path, line)
        self.expect("=")
        self.skip(_BLANK)
        self.value(path)

    def value(self, path: Path) -> None:
        if self.at >= len(self.text):
            raise _Confused
        character = self.text[self.at]
        if character in "\"'":
            self.string()
        elif character == "[":
            self.array(path)
        elif character == "{":
            self.inline(path)
        else:
            while self.at < len(self.text) and self.text[self.at] not in ",]}#\n":
                self.at += 1

    def array(self, path: Path) -> None:
        self.expect("[")
        index = 0
        while self.skip(_SPACE) and self.text[self.at] != "]":
            self.note(path + (index,), self.line)
            self.value(path + (index,))
            index += 1
            self.skip(_SPACE)
            if self.text.startswith(",", self.at):
                self.advance(1)
        self.expect("]")

    def inline(self, path: Path) -> None:
        self.expect("{")
        while self.skip(_SPACE) and self.text[self.at] != "}":
            self.pair(path)
            self.skip(_SPACE)
            if self.text.startswith(",", self.at):
                self.advance(1)
        self.expect("}")

    def string(self) -> None:
        """Move over a string of any of the four kinds."""
        quote = self.text[self.at]
        token = quote * 3 if self.text.startswith(quote * 3, self.at) else quote
        position = self.at + len(token)
        while not self.text.startswith(token, position):
            if position >= len(self.text):
                raise _Confused
            position += 2 if quote == '"' and self.text[position] == "\\" else 1
        position += len(token)
        if len(token) == 3:  # up to two more quotes belong to the string's own text
            while position < len(self.text) and self.text[position] == quote:
                position += 1
        self.advance(position - self.at)


def _unescape(text: str) -> str:
    """Return the text that a basic string with escapes stands for."""
    if "\\" not in text:
        return text
    try:
        return tomllib.loads(f'key = "{text}"')["key"]
    except tomllib.TOMLDecodeError:
        return text
