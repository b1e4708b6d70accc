"""Run the command line as ``python -m tegdesign``."""

from tegdesign.cli import main

main()
