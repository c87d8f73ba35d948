"""`python -m fieldfit`."""

from fieldfit.cli import main

raise SystemExit(main())
