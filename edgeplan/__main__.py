"""Run the command line as ``python -m edgeplan``."""

from edgeplan.cli import run

if __name__ == "__main__":
    run()
