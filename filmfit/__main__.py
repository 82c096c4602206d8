"""`python -m filmfit` is the command line."""

from filmfit.cli.main import main

main()
