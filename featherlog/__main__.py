"""Run the command line with ``python -m featherlog``."""

from featherlog.cli.main import run

if __name__ == "__main__":
    run()
