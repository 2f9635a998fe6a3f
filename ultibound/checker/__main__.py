"""Runs the checker as a program of its own."""

import sys

from .command import main

sys.exit(main())
