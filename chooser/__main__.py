"""`python -m chooser`."""

from chooser.cli.app import main

main()
