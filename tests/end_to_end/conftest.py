"""Shared by the end-to-end tests: the command line in this process."""

from __future__ import annotations

import sys

import pytest

from waveguide import cli


@pytest.fixture
def run(monkeypatch, capsys):
    """Run the command line in this process: exit status, standard output, standard error."""

    def go(*arguments):
        monkeypatch.setattr(sys, "argv", ["waveguide", *map(str, arguments)])
        with pytest.raises(SystemExit) as ended:
            cli.main()
        captured = capsys.readouterr()
        return ended.value.code or 0, captured.out, captured.err

    return go
