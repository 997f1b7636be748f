"""Run the command: python -m checker."""

from checker.cli import run

run()
