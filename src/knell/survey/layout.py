"""Where the files of a survey lie.

    results/cells/window-<depth>/<point>/    search.json, witness.json, aim-N<depth>-P<precision>.json,
                                             proofs-modes.json or proofs-windows.json
    <results of the config>/                 config.json, survey.nc, figures/, provenance.jsonl

Cells are named by what they depend on alone, so every config shares them. Beside each
file, in the folder ``.provenance``, lies the record of how it was made.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from pathlib import PurePosixPath

from knell.physics.exact import rational_slug
from knell.survey.points import Point

CELLS = "results/cells"
FIGURE_FORMATS = ("png", "pdf")
RECORDS = ".provenance"


@dataclass(frozen=True)
class CellFolder:
    """The folder of one point in one window: paths as text, relative to where the survey runs."""

    point: Point
    window_depth: Fraction
    root: str = CELLS

    @property
    def folder(self) -> str:
        return f"{self.root}/window-{rational_slug(self.window_depth)}/{self.point.slug}"

    @property
    def search(self) -> str:
        return f"{self.folder}/search.json"

    @property
    def witness(self) -> str:
        return f"{self.folder}/witness.json"

    def proofs(self, extent: str) -> str:
        """Proofs of the ``modes``, or of the complete ``windows``."""
        return f"{self.folder}/proofs-{extent}.json"

    def cell(self, depth: int, precision: int) -> str:
        """AIM at iteration depth ``depth`` in ``precision`` decimal digits."""
        return f"{self.folder}/aim-N{depth}-P{precision}.json"


def record_path(path: str) -> str:
    """The sidecar of a file: ``a/b.png`` has ``a/.provenance/b.png.json``."""
    file = PurePosixPath(path)
    return str(file.parent / RECORDS / f"{file.name}.json")
