"""What `waveguide cite` prints: the software, all shipped data, and methods the modules name."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

import waveguide
from waveguide.report.attributes import software_version
from waveguide.report.citation import DATA, METHODS, citation_bibtex, citation_text

PACKAGE = Path(waveguide.__file__).parent
SOURCES = PACKAGE.parent / "coastlines" / "SOURCES.md"


def one_line(text: str) -> str:
    return " ".join(text.split())


def test_software_comes_first_with_its_version():
    assert f"Version {software_version()}." in citation_text().split("Data,")[0].replace("\n", " ")
    assert f"note = {{Version {software_version()}}}" in citation_bibtex().split("\n\n")[0]


@pytest.mark.parametrize("reference", DATA, ids=lambda r: r.key)
def test_data_are_those_of_the_sources(reference):
    sources = one_line(SOURCES.read_text(encoding="utf-8")).lower()
    for word in (*reference.authors, *reference.title.split(", "), str(reference.year)):
        assert word.lower() in sources


def test_every_shipped_source_is_cited():
    table = re.findall(r"^\| `(\w+)\.nc` \|", SOURCES.read_text(encoding="utf-8"), re.M)
    cited = one_line(citation_text())
    words = {"shoreline": "shoreline:", "bathymetry": "depths:",
             "stratification": "stratification: temperature:", "monthly_winds": "monthly winds"}
    assert set(table) == set(words)
    assert all(word in cited for word in words.values())


@pytest.mark.parametrize("reference", METHODS, ids=lambda r: r.key)
def test_a_method_is_named_by_the_module_that_uses_it(reference):
    """Author, year and place stand together in a module: nothing is cited that is not used."""
    text = one_line("\n".join(p.read_text(encoding="utf-8") for p in PACKAGE.rglob("*.py")
                              if p.name != "citation.py"))  # fmt: skip
    near = rf"{re.escape(reference.authors[0])}[^.;]{{0,60}}?{reference.year}.{{0,120}}"
    found = re.findall(near, text)
    assert found
    if reference.pages:
        assert any(f"{reference.place} {reference.pages}" in each for each in found)


def test_bibtex_entries_are_well_formed():
    entries = citation_bibtex().split("\n\n")
    assert len(entries) == 1 + len(DATA) + len(METHODS)
    keys = []
    for entry in entries:
        head, *fields, last = entry.splitlines()
        assert last == "}"
        keys.append(re.fullmatch(r"@(?:article|misc)\{(\w+),", head)[1])
        names = [re.fullmatch(r"  (\w+) = \{.*\},", field)[1] for field in fields]
        assert {"author", "title", "year"} <= set(names)
        assert entry.startswith("@misc") or {"journal", "volume"} <= set(names)
        assert entry.count("{") == entry.count("}")
        assert not re.search(r"(?<!\\)[&%]", entry)
    assert len(set(keys)) == len(keys)
