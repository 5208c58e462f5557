"""Help is complete, its examples are commands, and a shell can complete what is typed."""

from __future__ import annotations

import os
import re
import shlex
import shutil
import subprocess
import sys
from typing import get_type_hints

import pytest
import typer.main

from waveguide.cli import app
from waveguide.shipped import JOBS, shipped_scenarios

GROUP = typer.main.get_command(app)
COMMANDS = GROUP.commands
PARAMETERS = [
    pytest.param(command, parameter, id=f"{name}-{parameter.name}")
    for name, command in COMMANDS.items()
    for parameter in command.params
    if parameter.name != "help"
]
# what a number is in; the names of parameters whose value is one
UNITS = {"lon": "degrees", "lat": "degrees", "drag": "m/s", "modes": "number", "period": "days",
         "region": "degrees", "workers": "number"}  # fmt: skip


def help_of(*words: str) -> str:
    """The help as it is printed, on one line."""
    command = GROUP
    context = command.make_context("waveguide", [], resilient_parsing=True)
    for word in words:
        command = COMMANDS[word]
        context = command.make_context(word, [], parent=context, resilient_parsing=True)
    return " ".join(command.get_help(context).split())


def told(parameter) -> str:
    """The words of the help of one parameter."""
    context = GROUP.make_context("waveguide", [], resilient_parsing=True)
    return " ".join(" ".join(parameter.get_help_record(context)).split())


@pytest.mark.parametrize(("command", "parameter"), PARAMETERS)
def test_every_parameter_has_help_a_default_and_units(command, parameter):
    assert parameter.help
    assert parameter.help.rstrip("] ").endswith((".", ")", "printed", "page", "tables", "text"))
    words = told(parameter)
    assert "[required]" in words if parameter.required else "[default: " in words
    if parameter.name in UNITS:
        assert UNITS[parameter.name] in words.lower()


def test_units_are_asked_of_every_number():
    numbers = {
        name
        for command in app.registered_commands
        for name, hint in get_type_hints(command.callback).items()
        if re.search(r"\b(int|float)\b", str(hint))
    }
    assert numbers | {"lon", "lat"} == set(UNITS)  # these two are read by `section` itself


@pytest.mark.parametrize("name", COMMANDS)
def test_help_says_examples_and_exit_status(name):
    text = help_of(name)
    assert "Examples:" in text
    for status in ("0 answered", "1 a defect", "2 the input cannot be used"):
        assert status in text


def examples(command) -> list[str]:
    return re.findall(r"^  (waveguide .*)$", command.epilog, re.M)


@pytest.mark.parametrize(
    ("name", "line"), [(n, line) for n, c in COMMANDS.items() for line in examples(c)]
)
def test_examples_are_commands_that_are_understood(name, line):
    _, word, *arguments = shlex.split(line.split(" > ")[0])
    assert word == name
    COMMANDS[name].make_context(name, list(arguments)).close()
    for scenario in set(arguments) & set(shipped_scenarios()):
        assert scenario in shipped_scenarios(JOBS[name])


def test_the_list_of_commands_is_not_cut_short():
    assert "..." not in help_of().split("Commands:")[1].split("Examples:")[0]
    for name in ("arrivals", "plan", "lookout", "compare", "response", "section", "atlas",
                 "scenarios", "cite"):  # fmt: skip
        assert f" {name} " in help_of()


def completed(line: str, folder) -> list[str]:
    """What a bash offers at the end of a line, by the command's own protocol."""
    words = line.split(" ")
    environment = os.environ | {
        "_WAVEGUIDE_COMPLETE": "complete_bash", "COMP_WORDS": line,
        "COMP_CWORD": str(len(words) - 1),
    }  # fmt: skip
    code = "import sys; sys.argv = ['waveguide']; from waveguide.cli import main; main()"
    done = subprocess.run([sys.executable, "-c", code], env=environment, cwd=folder,
                          capture_output=True, text=True, check=True)  # fmt: skip
    assert done.stderr == ""
    return done.stdout.split()


def test_commands_and_options_are_completed(tmp_path):
    assert set(completed("waveguide ", tmp_path)) == set(COMMANDS)
    assert completed("waveguide ar", tmp_path) == ["arrivals"]
    assert set(completed("waveguide arrivals --", tmp_path)) >= {"--out", "--json", "--page"}


@pytest.mark.parametrize("command", ["arrivals", "plan", "lookout", "response"])
def test_scenarios_are_completed_that_the_command_can_answer(command, tmp_path):
    offered = completed(f"waveguide {command} ", tmp_path)
    assert offered == list(shipped_scenarios(JOBS[command]))
    assert offered
    first = offered[0]
    assert first in completed(f"waveguide {command} {first[:4]}", tmp_path)


def test_files_and_folders_are_completed_beside_names(tmp_path):
    (tmp_path / "perused.toml").touch()
    (tmp_path / "peru.csv").touch()
    (tmp_path / "perspective").mkdir()
    (tmp_path / "perspective" / "a.toml").touch()
    assert completed("waveguide arrivals per", tmp_path) == [
        "peru_burst", "peru_gauges", "perspective/", "perused.toml",
    ]  # fmt: skip
    assert completed("waveguide arrivals perspective/", tmp_path) == ["perspective/a.toml"]
    assert completed("waveguide arrivals ./peru", tmp_path) == ["./perused.toml"]
    assert completed("waveguide arrivals nowhere/", tmp_path) == []


def test_completion_loads_no_heavy_library(tmp_path):
    code = (
        "import sys\nfrom waveguide.cli_arguments import _completion\n"
        "assert 'peru_burst' in _completion('event')('peru_b')\n"
        "print([m for m in ('numpy', 'xarray', 'pydantic') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_the_script_of_a_shell_is_shown(shell, tmp_path):
    environment = os.environ | {"_TYPER_COMPLETE_TEST_DISABLE_SHELL_DETECTION": "1"}
    code = (
        f"import sys; sys.argv = ['waveguide', '--show-completion', '{shell}']\n"
        "from waveguide.cli import main; main()"
    )
    done = subprocess.run([sys.executable, "-c", code], env=environment, cwd=tmp_path,
                          capture_output=True, text=True, check=True)  # fmt: skip
    assert "_WAVEGUIDE_COMPLETE" in done.stdout


@pytest.mark.skipif(shutil.which("bash") is None, reason="there is no bash")
def test_a_bash_completes_after_installation(tmp_path):
    """The installed script, in a bash of its own, with the command as a person has it."""
    command = tmp_path / "bin" / "waveguide"
    command.parent.mkdir()
    command.write_text(f"#!{sys.executable}\nfrom waveguide.cli import main\nmain()\n", "utf-8")
    command.chmod(0o755)
    environment = os.environ | {
        "HOME": str(tmp_path), "PATH": f"{command.parent}:{os.environ['PATH']}",
        "_TYPER_COMPLETE_TEST_DISABLE_SHELL_DETECTION": "1",
    }  # fmt: skip
    code = """
    waveguide --install-completion bash > /dev/null
    . ~/.bashrc
    COMP_WORDS=(waveguide arrivals peru); COMP_CWORD=2
    _waveguide_completion waveguide
    printf '%s\\n' "${COMPREPLY[@]}"
    """
    done = subprocess.run(["bash", "--norc", "-ec", code], env=environment, cwd=tmp_path,
                          capture_output=True, text=True, check=True)  # fmt: skip
    assert done.stdout.split() == ["peru_burst", "peru_gauges"]
