"""What a reader of the command line may meet: one class per reader, every message whole."""

from dataclasses import dataclass


@dataclass(frozen=True, order=True)
class Fault:
    """One thing that is wrong, and where.

    ``line`` and ``column`` count from 1; 0 means that the fault has no place of its own in the file.
    """

    line: int
    column: int
    text: str

    def __str__(self) -> str:
        """Write the fault as one line of a message."""
        if not self.line:
            return self.text
        column = f", column {self.column}" if self.column else ""
        return f"line {self.line}{column}: {self.text}"


class FaultsFound(Exception):
    """Faults of one file or folder, all of them at once; the command line exits with 2."""

    def __init__(self, source: str, faults: list[Fault] | str) -> None:
        found = [Fault(0, 0, faults)] if isinstance(faults, str) else sorted(set(faults))
        self.source = source
        self.faults = tuple(found)
        super().__init__(source, self.faults)

    def __str__(self) -> str:
        """Write the message: a head with the count, then one line for each fault."""
        if len(self.faults) == 1 and not self.faults[0].line:
            return f"{self.source}: {self.faults[0].text}"
        count = "1 fault" if len(self.faults) == 1 else f"{len(self.faults)} faults"
        return "\n".join([f"{self.source}: {count}", *(f"  {fault}" for fault in self.faults)])


class SpecFault(FaultsFound):
    """The spec, or its fit to what is built, is wrong."""


class DataFault(FaultsFound):
    """A data file does not hold what the spec declares."""


class FolderFault(FaultsFound):
    """A folder can't be read as a run, or can't be written to."""


class CallFault(FaultsFound):
    """The command line, or a call from Python, asks for something that can't be done."""


@dataclass(frozen=True)
class Disagreement:
    """One number that the two computations give differently, beyond what is accepted."""

    about: str
    quantity: str
    first: str
    second: str
    bound: float


class TwoComputationsDisagree(Exception):
    """The second computation gives other numbers: nothing is published; a defect of beforehand."""

    def __init__(self, disagreements: tuple[Disagreement, ...]) -> None:
        self.disagreements = disagreements
        super().__init__(disagreements)

    def __str__(self) -> str:
        """Name the first few disagreements, and say what that means."""
        shown = [f"  {d.about}: {d.quantity} {d.first} and {d.second}" for d in self.disagreements[:5]]
        more = len(self.disagreements) - len(shown)
        return "\n".join(
            [
                "The two computations disagree, so no report was written.",
                "This is a defect of beforehand: please report it with the folder that holds both numbers.",
                *shown,
                *([f"  and {more} more"] if more > 0 else []),
            ]
        )
