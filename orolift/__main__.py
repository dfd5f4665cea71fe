"""`python -m orolift` is the command `orolift`."""

from orolift.cli.main import run

run()
