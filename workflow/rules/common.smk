# The config, the hashes of the code that results depend on, and where files lie. No rules.

import os
import shlex
import sys
from pathlib import Path

try:
    import knell
except ModuleNotFoundError:
    sys.exit(f"knell is not installed for {sys.executable}: run `pip install -e .` in the folder of the Snakefile")

from knell.errors import KnellError
from knell.record import environment, source
from knell.record.verify import check_files
from knell.survey.config import DEFAULT, ConfigError, load_config, show_overrides
from knell.survey.layout import CELLS, FIGURE_FORMATS, record_path

# In the rules `knell` is this package under the interpreter that runs Snakemake, so nothing has to be activated, and
# `logged FILE command` keeps what the command says in its log, and shows it too when the command fails.
PYTHON = shlex.quote(sys.executable)
shell.prefix(
    "set -euo pipefail; "
    f'knell() (exec {PYTHON} -m knell "$@"); '
    'logged() (log=$1; shift; "$@" 2> "$log" || (cat "$log" >&2; exit 1)); '
)

SOLVER = source.source_hash(source.SOLVER)
PROVER = source.source_hash(source.PROVER)
OVERRIDES = workflow.config_settings.config


def config_file():
    """The one config of this run, relative to where it runs if it lies below."""
    given = workflow.configfiles
    if len(given) > 1:
        raise ConfigError(["--configfile: give one file; a second one would replace parts of the first"])
    file = Path(given[0]) if given else Path(workflow.basedir) / DEFAULT
    return str(file.relative_to(Path.cwd()) if file.is_relative_to(Path.cwd()) else file)


def config_json():
    """The config as it was understood, overrides included."""
    return f"{CONFIG.results}/config.json"


def dataset_file():
    return f"{CONFIG.results}/survey.nc"


def figure_files():
    return [f"{CONFIG.results}/figures/{name}.{suffix}" for name in FIGURES for suffix in FIGURE_FORMATS]


def provenance_file():
    return f"{CONFIG.results}/provenance.jsonl"


def products():
    """Every file that has a record beside it."""
    return [config_json(), *CONFIG.cell_files(), dataset_file(), *figure_files()]


def records(files):
    return [record_path(file) for file in files]


# One caption for each figure, named after it.
FIGURES = sorted(path.stem for path in Path(workflow.basedir, "workflow", "report").glob("*.rst"))

try:
    CONFIG = load_config(config_file(), OVERRIDES)
    if workflow.is_main_process:
        for line in check_files(products(), SOLVER):
            print(line, file=sys.stderr)
except KnellError as error:
    sys.exit(str(error))

# Asked for once here: git and the package metadata would cost every job as much as a small cell.
os.environ[environment.VARIABLE] = environment.examine().text()
