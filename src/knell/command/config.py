"""``knell config``: check a config, and write it down completed."""

from __future__ import annotations

import argparse

from knell.record.provenance import Making
from knell.survey import jsonfile
from knell.survey.config import Config, load_config, parse_overrides, show_overrides

DESCRIPTION = "Check a config and say what it asks for; with --output, write it completed for the next steps."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", help="the YAML file, such as config/config.yaml")
    parser.add_argument("--set", metavar="KEY=VALUE", action="append", default=[], help="replace a key of the file")
    parser.add_argument("--output", help="the JSON file to write")


def run(arguments: argparse.Namespace) -> None:
    overrides = parse_overrides(arguments.set)
    config = load_config(arguments.file, overrides)
    if arguments.output is None:
        print(_summary(config))
        return
    stated = {"config": arguments.file, "overrides": show_overrides(overrides)}
    making = Making.begin("resolve_config", (arguments.file,), stated)
    jsonfile.write(arguments.output, {"kind": "config", "format": jsonfile.FORMAT, **config.document()})
    making.finish(arguments.output)


def _summary(config: Config) -> str:
    points, cells = len(config.points), len(config.points) * len(config.depths) * len(config.precisions)
    return f"{points} points, {cells} cells of depth and precision, results in {config.results}"
