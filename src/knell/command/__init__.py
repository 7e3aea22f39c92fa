"""The command line: ``knell <command>``, also ``python -m knell <command>``.

Each command is a module of this package with ``DESCRIPTION``, ``add_arguments(parser)``
and ``run(arguments)``; only the one that is called is imported, because the workflow
starts hundreds of them. Every expected failure is one line on standard error.
"""

from __future__ import annotations

import argparse
import os
import re
import sys
from collections.abc import Sequence
from importlib import import_module
from typing import NoReturn

from knell import __version__
from knell.errors import ConfigError, FileError, KnellError

COMMANDS = {
    "modes": "quasinormal modes of one black hole, with digits and verdict",
    "prove": "modes of one black hole proven in ball arithmetic, or the complete list of a window",
    "trace": "how a file of the survey was made, and the command that makes it again",
    "config": "check a config; the workflow writes it down completed",
}
STEPS = {
    "search": "find every mode in the window of a point",
    "cell": "solve by asymptotic iteration at one depth and precision",
    "witness": "compute the modes of a point by other methods",
    "proofs": "prove the modes of a point, and that they are all of its window",
    "merge": "judge all results and write the dataset",
    "figure": "draw one figure of the dataset",
    "record": "check every file against its record and merge the records",
}
_INTERRUPTED = 130


class Parser(argparse.ArgumentParser):
    """An argument parser whose errors are one line."""

    def error(self, message: str) -> NoReturn:
        self.exit(2, f"{self.prog}: {message}; see {self.prog} --help\n")


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code: 0, or 1 after a line that says what went wrong, 2 for bad options."""
    # One command is one core to the scheduler; threads of the linear algebra would only contend.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    arguments = list(sys.argv[1:] if argv is None else argv)
    if arguments[:1] == ["--version"]:
        print(f"knell {__version__}")
        return 0
    if not arguments or arguments[0] in ("-h", "--help", "help"):
        print(_overview())
        return 0
    name, *rest = arguments
    if name not in COMMANDS and name not in STEPS:
        print(f"knell: no command {name!r}; the commands are {', '.join(COMMANDS)}; see knell --help", file=sys.stderr)
        return 2
    try:
        command = import_module(f"knell.command.{name}")
        parser = Parser(prog=f"knell {name}", description=command.DESCRIPTION)
        command.add_arguments(parser)
        return command.run(parser.parse_args(_join_negatives(rest))) or 0
    except ConfigError as error:
        print(error, file=sys.stderr)
        return error.exit_code
    except KnellError as error:
        print(f"knell {name}: {error}", file=sys.stderr)
        return error.exit_code
    except BrokenPipeError:
        # The reader has seen enough, as in `knell trace … | head`.
        sys.stderr.close()
        return 0
    except OSError as error:
        print(f"knell {name}: {FileError.from_os('use', error.filename or 'a file', error)}", file=sys.stderr)
        return FileError.exit_code
    except KeyboardInterrupt:
        print(f"knell {name}: interrupted", file=sys.stderr)
        return _INTERRUPTED


def _join_negatives(arguments: Sequence[str]) -> list[str]:
    """``--coupling -1/2`` as ``--coupling=-1/2``, since argparse takes ``-1/2`` for an option."""
    joined: list[str] = []
    for argument in arguments:
        if joined and re.fullmatch(r"--[a-z]+", joined[-1]) and re.fullmatch(r"-[\d.][\d.eE/+-]*", argument):
            joined[-1] += f"={argument}"
        else:
            joined.append(argument)
    return joined


def _overview() -> str:
    width = max(map(len, (*COMMANDS, *STEPS)))

    def table(commands: dict[str, str]) -> str:
        return "\n".join(f"  {name.ljust(width)}  {text}" for name, text in commands.items())

    return (
        "usage: knell <command> [options]\n\n"
        f"commands:\n{table(COMMANDS)}\n\nsteps of the workflow, run by snakemake:\n{table(STEPS)}\n\n"
        "knell <command> --help explains one; knell --version names the version"
    )
