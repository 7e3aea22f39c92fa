"""Before anything runs: mistakes in the config stop Snakemake with their lines alone."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from conftest import Workflow


def test_mistakes_are_printed_and_nothing_else(workflow: Workflow) -> None:
    workflow.config.write_text(workflow.config.read_text().replace("depths: [40, 60]", "depths: [0]\ndepht: 3"))
    code, text = workflow.run("--dry-run", "--config", "couplings=[1.2]")
    lines = [line for line in text.splitlines() if not line.startswith("Using workflow specific profile")]
    assert code == 1
    assert lines == [
        "--config: couplings[0]: 1.2 must be a number, at most 1 (above 1 there is no horizon), such as 0.9 or 9/10",
        "tiny.yaml:6: depths[0]: 0 must be a whole number, 1 or more",
        "tiny.yaml:7: depht: is no known key; did you mean depths?",
    ]
    assert not (workflow.folder / "results").exists()
