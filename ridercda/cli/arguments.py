"""Options the commands share, and where their JSON goes."""

from __future__ import annotations

import argparse
import json
import os
import sys
import tempfile
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any, NoReturn

from ridercda.errors import InputError


class Parser(argparse.ArgumentParser):
    """An argument parser whose errors are ordinary input errors."""

    def error(self, message: str) -> NoReturn:
        """Raise the message with the command's usage."""
        raise InputError(f"{message}\n{self.format_usage().rstrip()}")


def session_parser(command: str, description: str) -> Parser:
    """Return a parser for a command on one session with optional JSON."""
    parser = Parser(prog=f"ridercda {command}", description=description)
    parser.add_argument("session", metavar="SESSION", type=Path, help="a session folder or its session.toml")
    parser.add_argument("--json", metavar="FILE", help="write the result as JSON; - for standard output")
    return parser


def parsed(parser: Parser, words: Sequence[str]) -> argparse.Namespace | None:
    """Return the parsed arguments, None when help was asked for and printed."""
    if "-h" in words or "--help" in words:
        parser.print_help(sys.stdout)
        return None
    return parser.parse_args(list(words))


def write_json(content: Mapping[str, Any], target: str) -> None:
    """Write JSON to a file in one step, or to standard output for "-".

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    text = json.dumps(content, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
    if target == "-":
        sys.stdout.write(text)
        return
    path = Path(target)
    try:
        handle, name = tempfile.mkstemp(prefix=f".{path.name}-", dir=path.parent)
        with os.fdopen(handle, "w", encoding="utf-8") as file:
            file.write(text)
        os.chmod(name, 0o644)
        os.replace(name, path)
    except OSError as error:
        raise InputError(
            f"{target}: cannot be written: {error.strerror}; name a file in a folder you may use"
        ) from error
