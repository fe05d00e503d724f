"""``python -m ridercda`` is the same as ``ridercda``."""

from ridercda.cli.main import entry

if __name__ == "__main__":
    entry()
