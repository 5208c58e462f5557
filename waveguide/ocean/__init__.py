"""Depth and stratification of the sea: the packaged data or the user's own files."""

from waveguide.ocean.bathymetry import Bathymetry, packaged_bathymetry, read_bathymetry
from waveguide.ocean.hydrography import read_climatology
from waveguide.ocean.stratification import Climatology, Profiles, packaged_climatology

__all__ = [
    "Bathymetry",
    "Climatology",
    "Profiles",
    "packaged_bathymetry",
    "packaged_climatology",
    "read_bathymetry",
    "read_climatology",
]
