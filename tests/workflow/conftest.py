"""Run Snakemake on this checkout's Snakefile, in a folder of its own."""

from __future__ import annotations

import re
import signal
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
TINY = ROOT / "tests" / "config" / "tiny.yaml"


@dataclass(frozen=True)
class Workflow:
    """``config`` is a copy of the tiny config that a test may edit; results go to ``results/tiny``.

    ``targets`` are the files to make; none means all.
    """

    folder: Path
    config: Path
    targets: tuple[str, ...] = ()

    def command(self, *options: str) -> list[str]:
        fixed = ["--snakefile", str(ROOT / "Snakefile"), "--cores", "2", "--configfile", "tiny.yaml"]
        return [sys.executable, "-m", "snakemake", *self.targets, *fixed, *options]

    def start(self, *options: str) -> subprocess.Popen[str]:
        """Snakemake in a process group of its own, as a terminal starts it."""
        return subprocess.Popen(
            self.command(*options),
            cwd=self.folder,
            stdout=subprocess.PIPE,
            stderr=subprocess.STDOUT,
            text=True,
            start_new_session=True,
            # Whoever starts the tests in the background has them ignore Ctrl-C.
            preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),
        )

    def run(self, *options: str) -> tuple[int, str]:
        """Exit code and everything printed."""
        process = self.start(*options)
        return process.wait(), process.communicate()[0]

    def jobs(self, *options: str) -> dict[str, int]:
        """How many jobs of each rule a run would start now."""
        code, text = self.run("--dry-run", *options)
        assert code == 0, text
        if "Nothing to be done" in text:
            return {}
        table = text.rsplit("Job stats:", 1)[1].split("total")[0]
        return {rule: int(count) for rule, count in re.findall(r"^(\w+) +(\d+)$", table, re.MULTILINE)}

    def complete(self) -> Workflow:
        """Run to the end, which must go well."""
        code, text = self.run()
        assert code == 0, text
        assert self.jobs() == {}
        return self

    @property
    def dataset(self) -> bytes:
        return (self.folder / "results/tiny/survey.nc").read_bytes()

    def cells(self) -> dict[str, bytes]:
        """Every result file of the points."""
        return {str(p.relative_to(self.folder)): p.read_bytes() for p in self.folder.glob("results/cells/*/*/*.json")}

    @staticmethod
    def descendants(pid: int) -> dict[int, str]:
        """Process id and command line of everything that ``pid`` has started, directly or not."""
        parents: dict[int, list[int]] = {}
        for stat in Path("/proc").glob("[0-9]*/stat"):
            try:
                parent = int(stat.read_text().rpartition(")")[2].split()[1])
            except (OSError, IndexError):
                continue
            parents.setdefault(parent, []).append(int(stat.parent.name))
        found, pending = {}, [pid]
        while pending:
            for child in parents.get(pending.pop(), []):
                pending.append(child)
                try:
                    found[child] = Path(f"/proc/{child}/cmdline").read_bytes().replace(b"\0", b" ").decode()
                except OSError:
                    continue
        return found

    @staticmethod
    def alive(pid: int) -> bool:
        """Running, and not merely waiting to be collected."""
        try:
            state = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0]
        except OSError:
            return False
        return state not in "ZX"


@pytest.fixture
def workflow(tmp_path: Path) -> Workflow:
    """Nothing has run yet."""
    config = tmp_path / "tiny.yaml"
    config.write_text(TINY.read_text())
    return Workflow(tmp_path, config)


@pytest.fixture(scope="session")
def finished(tmp_path_factory: pytest.TempPathFactory) -> Workflow:
    """A run that nothing has disturbed; not to be changed."""
    folder = tmp_path_factory.mktemp("finished")
    config = folder / "tiny.yaml"
    config.write_text(TINY.read_text())
    return Workflow(folder, config).complete()


@pytest.fixture
def copied(finished: Workflow, tmp_path: Path) -> Workflow:
    """A finished run that a test may change."""
    subprocess.run(["cp", "-a", f"{finished.folder}/.", str(tmp_path)], check=True)
    return Workflow(tmp_path, tmp_path / "tiny.yaml")
