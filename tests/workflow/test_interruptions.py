"""Runs that are stopped, by Ctrl-C or without warning: the next run completes to the same bytes."""

from __future__ import annotations

import dataclasses
import os
import signal
import subprocess
import time
from typing import TYPE_CHECKING

import pytest

if TYPE_CHECKING:
    from conftest import Workflow

pytestmark = pytest.mark.slow

_PATIENCE = 120


@pytest.fixture
def survey(workflow: Workflow) -> Workflow:
    """Up to the dataset: figures have nothing to add here and take their time."""
    return dataclasses.replace(workflow, targets=("results/tiny/survey.nc",))


def wait_for(workflow: Workflow, run: subprocess.Popen[str], command: str, point: str = "") -> int:
    """The process id of the first shell that runs a job with this ``knell`` command, for this point if one is given."""
    deadline = time.monotonic() + _PATIENCE
    while time.monotonic() < deadline:
        assert run.poll() is None, run.communicate()[0]
        for pid, line in workflow.descendants(run.pid).items():
            if "bash" in line and f" knell {command} --point {point}" in line:
                return pid
        time.sleep(0.01)
    raise AssertionError(f"no {command} job in {_PATIENCE} s")


def wait_until_dead(workflow: Workflow, pids: list[int]) -> None:
    deadline = time.monotonic() + _PATIENCE
    while any(workflow.alive(pid) for pid in pids):
        assert time.monotonic() < deadline
        time.sleep(0.02)


def files_of(workflow: Workflow, point: str) -> int:
    return sum(point in name for name in workflow.cells())


def same_as(workflow: Workflow, finished: Workflow) -> None:
    assert workflow.complete().cells() == finished.cells()
    assert workflow.dataset == finished.dataset


@pytest.mark.parametrize("command", ["search", "witness", "cell"])
def test_interrupted_by_ctrl_c(survey: Workflow, finished: Workflow, command: str) -> None:
    run = survey.start()
    wait_for(survey, run, command)
    os.killpg(run.pid, signal.SIGINT)
    text = run.communicate()[0]
    assert run.returncode != 0, text
    same_as(survey, finished)


@pytest.mark.parametrize("command", ["search", "witness"])
def test_killed_without_warning(survey: Workflow, finished: Workflow, command: str) -> None:
    """The lock stays, so one command is needed; orphans go on and may write, but only whole files."""
    run = survey.start()
    wait_for(survey, run, command)
    orphans = list(survey.descendants(run.pid))
    os.kill(run.pid, signal.SIGKILL)
    run.communicate()
    code, text = survey.run()
    assert code == 1 and "--unlock" in text
    code, text = survey.run("--unlock")
    assert code == 0, text
    # At once, while orphans may still be at work.
    same_as(survey, finished)
    wait_until_dead(survey, orphans)
    same_as(survey, finished)


@pytest.mark.parametrize("command", ["search", "cell"])
def test_the_shell_of_one_job_killed(survey: Workflow, finished: Workflow, command: str) -> None:
    """The run itself tries the job once more."""
    run = survey.start()
    os.kill(wait_for(survey, run, command), signal.SIGKILL)
    text = run.communicate()[0]
    assert run.returncode == 0, text
    assert "Trying to restart job" in text
    same_as(survey, finished)


def test_a_lost_job_does_not_take_the_others_with_it(survey: Workflow, finished: Workflow) -> None:
    """Without a second try, the point whose search is lost has no results; the other point has all of its own."""
    run = survey.start("--retries", "0")
    shell = wait_for(survey, run, "search", "axial-l2-n4-k1_2")
    orphans = list(survey.descendants(shell))
    os.kill(shell, signal.SIGKILL)
    text = run.communicate()[0]
    assert run.returncode == 1 and "search.smk" in text
    # A search, a witness, proofs and two cells.
    assert (files_of(survey, "schwarzschild"), files_of(survey, "n4-k1_2/aim")) == (5, 0)
    wait_until_dead(survey, orphans)
    same_as(survey, finished)
