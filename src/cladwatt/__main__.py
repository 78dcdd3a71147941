"""Run the command line with ``python -m cladwatt``."""

from cladwatt.faces.cli.main import run

if __name__ == "__main__":
    run()
