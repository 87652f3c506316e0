"""What a suspect is: a choice that another program may have made, and its effect on a range."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from lighttime.crosscheck.scene import Choice, Effect

FAMILIES = ("term", "time", "frame", "solution", "constant", "ephemeris", "offset")


@dataclass(frozen=True, eq=False)
class Suspect:
    """A choice that explains a difference, and how it shows.

    Attributes
    ----------
    name : str
        Short, unique.
    family : str
        One of `FAMILIES`.
    says : str
        The choice in a few words.
    look_for : str
        What to look for in the other program.
    effect : callable
        From a `Scene` to what a range with that choice is longer than ours, in ps, at amplitude 1.
    readings : mapping of float to str
        The amplitudes that mean something, and what they mean. None for a free offset.
    unit : str
        Unit of the amplitude of a free offset; empty where 1 means "the choice was made".
    plausible : float
        A size of the amplitude that would not surprise: it sets what a free amplitude costs.
    block : str
        Free offsets that go together, as the three coordinates of a station: they are looked at
        as one, and as one they are counted.
    choice : callable or None
        For a choice too large to add to others: the model and the query as the other program
        has them. Once found it is applied, and the search goes on from there.
    """

    name: str
    family: str
    says: str
    look_for: str
    effect: Effect
    readings: Mapping[float, str] = field(default_factory=dict)
    unit: str = ""
    plausible: float = 1.0
    block: str = ""
    choice: Choice | None = None

    @property
    def is_offset(self) -> bool:
        """Whether any amplitude is as good as another."""
        return not self.readings

    def __str__(self) -> str:
        return f"{self.name}: {self.says}"
