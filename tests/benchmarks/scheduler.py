"""What the scheduler adds to each job, from one run: run by hand, prints seconds, asserts nothing.

    python tests/benchmarks/scheduler.py

Runs a small survey on one core in a folder of its own. A job's own time is what its record says it computed,
its start what a process that computes nothing takes; the rest of the wall time is Snakemake's.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).parents[2]
CONFIG = """\
ell: {axial: [2]}
exponents: [4]
couplings: [0.25, 0.5, 0.75]
overtones: 2
depths: [50, 60, 70, 80, 90, 100]
precisions: [60, 80]
window: 0.5
"""


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "small.yaml").write_text(CONFIG)
        begun = time.perf_counter()
        snakemake = [sys.executable, "-m", "snakemake", "--snakefile", str(ROOT / "Snakefile"), "--cores", "1"]
        environment = {**os.environ, "PYTHONPATH": str(ROOT / "src")}
        subprocess.run(
            [*snakemake, "--configfile", "small.yaml"], cwd=folder, env=environment, check=True, capture_output=True
        )
        wall = time.perf_counter() - begun
        lines = (Path(folder) / "results/small/provenance.jsonl").read_text().splitlines()
    records = {(record["rule"], record["id"]): record["seconds"] for record in map(json.loads, lines)}
    computing = sum(records.values())
    start = min(_empty_command(environment) for _ in range(5))
    jobs = len(records)
    rest = wall - computing - jobs * start
    cells = [seconds for (rule, _), seconds in records.items() if rule == "cell"]
    print(f"{jobs} jobs, {wall:.1f} s in all: {computing:.1f} s computing, {jobs * start:.1f} s starting processes")
    print(f"{rest:.1f} s scheduler and graph: {rest / jobs:.3f} s a job")
    print(f"a cell computes {sum(cells) / len(cells):.3f} s and starts in {start:.3f} s")


def _empty_command(environment: dict[str, str]) -> float:
    begun = time.perf_counter()
    subprocess.run([sys.executable, "-m", "knell", "--version"], env=environment, check=True, capture_output=True)
    return time.perf_counter() - begun


if __name__ == "__main__":
    main()
