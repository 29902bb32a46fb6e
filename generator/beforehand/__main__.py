"""``python -m beforehand`` is the same as ``beforehand``."""

from beforehand.cli import main

main()
