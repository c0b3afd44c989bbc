"""The user's own parts as the shelf offers them: those in the shelf file, and those the drawing carries."""

from pathlib import Path

from msgspec.structs import replace

from app.model.drawing import Drawing, Part, Symbol
from app.model.errors import FileError
from app.model.parts import load_shelf, save_shelf


class OwnParts:
    """Read once; every change is written to the shelf file at once. Methods answer a sentence, or nothing."""

    def __init__(self, path: Path) -> None:
        self._path = path
        self.kept: list[Part] = []
        self.trouble = ""
        try:
            self.kept = list(load_shelf(path))
        except FileError as error:
            self.trouble = str(error)

    def offered(self, drawing: Drawing) -> list[Part]:
        """The kept parts, then those that came with the drawing and are not kept under the same name."""
        names = {part.name for part in self.kept}
        return [*self.kept, *(part for part in drawing.parts.values() if part.name not in names)]

    def keep(self, part: Part) -> str:
        """Put a part on the shelf, in place of one of the same name and kind."""
        same = self._place(part.name)
        parts = list(self.kept)
        if same is None:
            parts.append(part)
        elif type(parts[same].element) is not type(part.element):
            return f"The shelf has a part named {part.name} of another kind; give this one another name."
        else:
            symbol = part.symbol if part.symbol is not None else parts[same].symbol
            parts[same] = replace(part, symbol=symbol)
        return self._write(parts)

    def rename(self, part: Part, name: str) -> str:
        """Give a part another name."""
        name = name.strip()
        if not name or len(name) > 80:
            return (
                "Part: the name is " + ("blank" if not name else "too long") + ", allowed is 1 to 80 letters."
            )
        if name != part.name and self._place(name) is not None:
            return f"The shelf has a part named {name} already."
        return self._put(part, replace(part, name=name))

    def remove(self, part: Part) -> str:
        """Take a part off the shelf; drawings that carry it keep it."""
        return self._write([other for other in self.kept if other != part])

    def wear(self, part: Part, symbol: Symbol | None) -> str:
        """Give a part another symbol, or the default one back."""
        return self._put(part, replace(part, symbol=symbol))

    def _put(self, part: Part, changed: Part) -> str:
        if part not in self.kept:
            return self._write([*self.kept, changed])
        return self._write([changed if other == part else other for other in self.kept])

    def _place(self, name: str) -> int | None:
        return next((k for k, part in enumerate(self.kept) if part.name == name), None)

    def _write(self, parts: list[Part]) -> str:
        try:
            save_shelf(self._path, parts)
        except FileError as error:
            return str(error)
        self.kept = parts
        return ""
