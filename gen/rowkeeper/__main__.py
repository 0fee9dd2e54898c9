"""`python -m rowkeeper`."""

from rowkeeper.cli import main

main()
