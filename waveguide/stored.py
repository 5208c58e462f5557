"""Arrays with dimensions and attributes, as a Dataset has them, without xarray.

Importing xarray takes as long as computing many an answer, and a table for the terminal needs
nothing of what it can do with arrays.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, NamedTuple, Protocol

from numpy.typing import NDArray

if TYPE_CHECKING:
    import xarray as xr


class Stored(Protocol):
    """What `Arrays` and an xarray Dataset have in common."""

    @property
    def variables(self) -> Mapping[Any, Any]:
        """By name."""

    @property
    def sizes(self) -> Mapping[Any, int]:
        """Lengths of the dimensions."""

    @property
    def attrs(self) -> Mapping[Any, Any]:
        """Global attributes."""

    def __getitem__(self, name: str, /) -> Any:
        """A variable, with `dims`, `values` and `attrs`."""


class Column(NamedTuple):
    """A variable.

    Attributes
    ----------
    dims : tuple of str
    values : ndarray
    attrs : dict
    """

    dims: tuple[str, ...]
    values: NDArray[Any]
    attrs: dict[str, str]


@dataclass(frozen=True)
class Arrays:
    """Variables, coordinates among them, and global attributes.

    Attributes
    ----------
    variables : dict of str to Column
    coordinates : list of str
        Names of those variables that say where, rather than what.
    attrs : dict
    """

    variables: dict[str, Column]
    coordinates: list[str]
    attrs: dict[str, Any]

    def __getitem__(self, name: str, /) -> Column:
        """A variable."""
        return self.variables[name]

    @property
    def sizes(self) -> dict[str, int]:
        """Lengths of the dimensions."""
        return {
            dim: size
            for column in self.variables.values()
            for dim, size in zip(column.dims, column.values.shape, strict=True)
        }

    def dataset(self) -> xr.Dataset:
        """The same for xarray."""
        import xarray as xr

        # lists, not sets: their order is that of the file, and must be the same in every run
        others = [name for name in self.variables if name not in self.coordinates]
        return xr.Dataset(
            {name: self.variables[name] for name in others},
            {name: self.variables[name] for name in self.coordinates},
            self.attrs,
        )
