"""`python -m screener`."""

from screener.cli import main

main()
