"""Runs the command line as ``python -m gaitlab``."""

from gaitlab.cli.main import main

if __name__ == "__main__":
    main()
