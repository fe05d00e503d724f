"""``ridercda samples``: copy the sample sessions to a folder of the user's."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Sequence
from pathlib import Path

from ridercda.cli.arguments import Parser, parsed
from ridercda.errors import InputError
from ridercda.session.samples import samples_folder


def command(words: Sequence[str]) -> int:
    """Copy the samples; an existing folder of the same name is left as it is and said so."""
    parser = Parser(prog="ridercda samples", description="Copy the invented sample sessions to a folder.")
    parser.add_argument("folder", metavar="FOLDER", type=Path, nargs="?", default=Path("ridercda-samples"))
    arguments = parsed(parser, words)
    if arguments is None:
        return 0
    source = samples_folder()
    if source is None:
        raise InputError("the sample sessions are not part of this installation; install the package anew")
    for sample in sorted(path for path in source.iterdir() if path.is_dir()):
        target = arguments.folder / sample.name
        if target.exists():
            sys.stdout.write(f"{target} is there already and was left as it is\n")
            continue
        try:
            shutil.copytree(sample, target)
        except OSError as error:
            raise InputError(f"{target}: cannot be written: {error.strerror}") from error
        sys.stdout.write(f"{target}\n")
    return 0
