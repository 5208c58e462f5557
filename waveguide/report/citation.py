"""How to cite the software, the data it ships and the methods it uses."""

from __future__ import annotations

from dataclasses import dataclass

from waveguide.report.attributes import software_version
from waveguide.report.layout import filled

YEAR = 2026
"""Of this version."""

AUTHORS = ("The waveguide developers",)
TITLE = (
    "waveguide: arrival times and amplitudes of wind-driven sea-level signals along coasts and the "
    "equator"
)


@dataclass(frozen=True)
class Reference:
    """A work to cite.

    Attributes
    ----------
    use : str
        What of an answer rests on it.
    authors : tuple of str
    year : int
    title : str
    place : str
        Journal or publisher.
    pages : str
        Volume and first page as in "4, 83"; empty for what has none.
    """

    use: str
    authors: tuple[str, ...]
    year: int
    title: str
    place: str
    pages: str = ""

    @property
    def key(self) -> str:
        """Of its BibTeX entry."""
        names = "".join(self.authors if len(self.authors) < 3 else (self.authors[0], "etal"))
        return "".join(c for c in names.lower() if c.isascii() and c.isalnum()) + str(self.year)

    @property
    def line(self) -> str:
        """As in a list of references."""
        where = f"{self.place} {self.pages}".strip()
        stop = "" if self.title.endswith("?") else "."
        return f"{_listed(self.authors)} ({self.year}): {self.title}{stop} {where}."

    @property
    def entry(self) -> str:
        """As a BibTeX entry."""
        volume, _, page = self.pages.partition(", ")
        kind, place = ("article", "journal") if self.pages else ("misc", "howpublished")
        fields = {
            "author": " and ".join(f"{{{name}}}" for name in self.authors),
            "title": f"{{{self.title}}}", "year": str(self.year), place: self.place,
            "volume": volume, "pages": page, "note": self.use,
        }  # fmt: skip
        return _entry(kind, self.key, fields)


def _entry(kind: str, key: str, fields: dict[str, str]) -> str:
    lines = [f"  {name} = {{{_escaped(value)}}}," for name, value in fields.items() if value]
    return "\n".join([f"@{kind}{{{key},", *lines, "}"])


def _escaped(text: str) -> str:
    return text.replace("&", r"\&").replace("%", r"\%")


def _listed(names: tuple[str, ...]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


_JPO, _JGR = "J. Phys. Oceanogr.", "J. Geophys. Res."

DATA = (
    Reference("shoreline", ("Wessel", "Smith"), 1996,
              "A global, self-consistent, hierarchical, high-resolution shoreline database",
              _JGR, "101, 8741"),
    Reference("depths", ("Amante", "Eakins"), 2009,
              "ETOPO1 1 Arc-Minute Global Relief Model: Procedures, Data Sources and Analysis",
              "NOAA Technical Memorandum NESDIS NGDC-24"),
    Reference("stratification: temperature", ("Levitus", "Boyer"), 1994,
              "World Ocean Atlas 1994, vol. 4: Temperature", "NOAA Atlas NESDIS 4"),
    Reference("stratification: salinity", ("Levitus", "Burgett", "Boyer"), 1994,
              "World Ocean Atlas 1994, vol. 3: Salinity", "NOAA Atlas NESDIS 3"),
    Reference("monthly winds of `waveguide response`",
              ("Fleet Numerical Oceanography Center",), 1992,
              "Monthly mean winds, 1982–1992", "U.S. Navy"),
)  # fmt: skip
"""As `coastlines/SOURCES.md` has them."""

METHODS = (
    Reference("vertical modes and Kelvin waves", ("Gill",), 1982,
              "Atmosphere-Ocean Dynamics", "Academic Press"),
    Reference("density and buoyancy frequency", ("IOC", "SCOR", "IAPSO"), 2010,
              "The international thermodynamic equation of seawater – 2010",
              "Intergovernmental Oceanographic Commission, Manuals and Guides 56"),
    Reference("coastal-trapped modes of a section", ("Huthnance",), 1978,
              "On coastal trapped waves: analysis and numerical calculation by inverse iteration",
              _JPO, "8, 74"),
    Reference("coastal-trapped modes driven by wind", ("Gill", "Schumann"), 1974,
              "The generation of long shelf waves by the wind", _JPO, "4, 83"),
    Reference("bottom friction", ("Brink", "Allen"), 1978,
              "On the effect of bottom friction on barotropic motion over the continental shelf",
              _JPO, "8"),
    Reference("interior damping", ("McCreary",), 1981,
              "A linear stratified ocean model of the equatorial undercurrent",
              "Phil. Trans. R. Soc. A", "298, 603"),
    Reference("critical frequencies of coasts", ("Clarke", "Shi"), 1991,
              "Critical frequencies at ocean boundaries", _JGR, "96, 10731"),
    Reference("eastern boundaries below the critical frequency", ("Grimshaw", "Allen"), 1988,
              "Low-frequency baroclinic waves off coastal boundaries", _JPO, "18, 1124"),
    Reference("amplitude along western boundaries", ("Johnson", "Marshall"), 2002,
              "A theory for the surface Atlantic response to thermohaline variability",
              _JPO, "32, 1121"),
    Reference("equatorial waves at coasts", ("Moore",), 1968,
              "Planetary-gravity waves in an equatorial ocean", "Thesis, Harvard University"),
    Reference("equatorial waves at coasts", ("Cane", "Sarachik"), 1977,
              "Forced baroclinic ocean motions: II. The linear equatorial bounded case",
              "J. Mar. Res.", "35, 395"),
    Reference("equatorial waves at coasts", ("Clarke",), 1983,
              "The reflection of equatorial waves from oceanic boundaries", _JPO, "13, 1193"),
    Reference("straits", ("Toulany", "Garrett"), 1984,
              "Geostrophic control of fluctuating barotropic flow through straits",
              _JPO, "14, 649"),
    Reference("straits", ("Johnson", "Garrett"), 2006,
              "What fraction of a Kelvin wave incident on a narrow strait is transmitted?",
              _JPO, "36, 945"),
    Reference("wind stress", ("Large", "Pond"), 1981,
              "Open ocean momentum flux measurements in moderate to strong winds",
              _JPO, "11, 324"),
    Reference("wind stress", ("Trenberth", "Large", "Olson"), 1990,
              "The mean annual cycle in global ocean wind stress", _JPO, "20, 1742"),
    Reference("size of errors in phase speed", ("Chelton", "deSzoeke", "Schlax", "El Naggar",
                                                "Siwertz"), 1998,
              "Geographical variability of the first baroclinic Rossby radius of deformation",
              _JPO, "28, 433"),
    Reference("ensembles", ("Owen",), 1997,
              "Monte Carlo variance of scrambled net quadrature", "SIAM J. Numer. Anal.",
              "34, 1884"),
    Reference("shares of the spread", ("Sudret",), 2008,
              "Global sensitivity analysis using polynomial chaos expansions",
              "Reliab. Eng. Syst. Saf.", "93, 964"),
    Reference("chance of a lag between records", ("Theiler", "Eubank", "Longtin", "Galdrikian",
                                                  "Farmer"), 1992,
              "Testing for nonlinearity in time series: the method of surrogate data",
              "Physica D", "58, 77"),
)  # fmt: skip
"""The ones that most rests on; the docstring of each module names all it uses."""


def citation_text() -> str:
    """How to cite, as text.

    Returns
    -------
    str
        The software, then the data it ships and the methods it uses, each with what rests on it.
    """
    version = software_version()
    parts = [
        "Software", filled(f"  {AUTHORS[0]} ({YEAR}): {TITLE}. Version {version}.", 6),
        "", "Data, those that your answer rests on (own files take their place)",
        *(filled(f"  {each.use}: {each.line}", 6) for each in DATA),
        "", "Methods, those that your answer rests on",
        *(filled(f"  {each.use}: {each.line}", 6) for each in METHODS),
    ]  # fmt: skip
    return "\n".join(parts)


def citation_bibtex() -> str:
    """How to cite, as BibTeX entries.

    Returns
    -------
    str
    """
    software = _entry("misc", f"waveguide{YEAR}", {
        "author": f"{{{AUTHORS[0]}}}", "title": f"{{{TITLE}}}", "year": str(YEAR),
        "note": f"Version {software_version()}",
    })  # fmt: skip
    return "\n\n".join([software, *(each.entry for each in (*DATA, *METHODS))])
