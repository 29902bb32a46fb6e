"""Named entries, one to a file: nothing is imported to know the names, and one file is imported to use one."""

import difflib
import importlib
import pkgutil
from collections.abc import Iterator
from typing import Any, Generic, TypeVar, cast

Entry = TypeVar("Entry")


class Catalogue(Generic[Entry]):
    """The entries of one package: the file's name, the function's name and the word in a spec are the same word.

    ``catalogue["holm"]`` imports that one file and gives its entry; ``catalogue.holm`` is the same for Python users.
    """

    def __init__(self, package: str, *, kind: str) -> None:
        self._package = package
        self._names: tuple[str, ...] | None = None
        self.kind = kind

    @property
    def names(self) -> tuple[str, ...]:
        """The words of all entries, in alphabetical order."""
        if self._names is None:
            path = importlib.import_module(self._package).__path__
            self._names = tuple(sorted(module.name for module in pkgutil.iter_modules(path)))
        return self._names

    def __iter__(self) -> Iterator[str]:
        return iter(self.names)

    def __len__(self) -> int:
        return len(self.names)

    def __contains__(self, name: object) -> bool:
        return name in self.names

    def __getitem__(self, name: str) -> Entry:
        if name not in self:
            near = self.nearest(name)
            hint = f" The nearest name is '{near}'." if near else f" The names are: {', '.join(self.names)}."
            raise KeyError(f"no {self.kind} is called '{name}'.{hint}")
        return cast(Entry, getattr(self.module(name), name))

    def __getattr__(self, name: str) -> Entry:
        if name.startswith("_"):
            raise AttributeError(name)
        try:
            return self[name]
        except KeyError as missing:
            raise AttributeError(missing.args[0]) from None

    def __dir__(self) -> list[str]:
        return [*super().__dir__(), *self.names]

    def module(self, name: str) -> Any:
        """Import the file of one entry."""
        return importlib.import_module(f"{self._package}.{name}")

    def nearest(self, word: str) -> str | None:
        """Give the entry whose name is most like ``word``, or None when none is near."""
        near = difflib.get_close_matches(word, self.names, n=1, cutoff=0.5)
        return near[0] if near else None
