"""Runs that are stopped, by Ctrl-C or without warning: the next run completes to the same bytes."""

from __future__ import annotations

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


def wait_for(workflow: Workflow, run: subprocess.Popen[str], command: str) -> int:
    """The process id of the first shell that runs a job with this ``knell`` command."""
    deadline = time.monotonic() + _PATIENCE
    while time.monotonic() < deadline:
        assert run.poll() is None, run.communicate()[0]
        for pid, line in workflow.descendants(run.pid).items():
            if "bash" in line and f"; knell {command} " in line:
                return pid
        time.sleep(0.01)
    raise AssertionError(f"no {command} job in {_PATIENCE} s")


def wait_until_dead(workflow: Workflow, pids: list[int]) -> None:
    deadline = time.monotonic() + _PATIENCE
    while any(workflow.alive(pid) for pid in pids):
        assert time.monotonic() < deadline
        time.sleep(0.02)


def same_as(workflow: Workflow, finished: Workflow) -> None:
    assert workflow.complete().cells() == finished.cells()
    assert workflow.dataset == finished.dataset


@pytest.mark.parametrize("command", ["search", "witness", "cell"])
def test_interrupted_by_ctrl_c(workflow: Workflow, finished: Workflow, command: str) -> None:
    run = workflow.start()
    wait_for(workflow, run, command)
    os.killpg(run.pid, signal.SIGINT)
    text = run.communicate()[0]
    assert run.returncode != 0, text
    assert "Traceback" not in text
    same_as(workflow, finished)


@pytest.mark.parametrize("command", ["search", "witness"])
def test_killed_without_warning(workflow: Workflow, finished: Workflow, command: str) -> None:
    """The lock stays, so one command is needed; orphans go on and may write, but only whole files."""
    run = workflow.start()
    wait_for(workflow, run, command)
    orphans = list(workflow.descendants(run.pid))
    os.kill(run.pid, signal.SIGKILL)
    run.communicate()
    code, text = workflow.run()
    assert code == 1 and "--unlock" in text
    code, text = workflow.run("--unlock")
    assert code == 0, text
    # At once, while orphans may still be at work.
    same_as(workflow, finished)
    wait_until_dead(workflow, orphans)
    same_as(workflow, finished)


@pytest.mark.parametrize("command", ["search", "cell"])
def test_the_shell_of_one_job_killed(workflow: Workflow, finished: Workflow, command: str) -> None:
    """The run itself tries the job once more."""
    run = workflow.start()
    os.kill(wait_for(workflow, run, command), signal.SIGKILL)
    text = run.communicate()[0]
    assert run.returncode == 0, text
    assert "Error in rule" in text
    same_as(workflow, finished)
