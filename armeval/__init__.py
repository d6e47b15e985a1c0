"""From joint-level cogging to the tip of the arm."""

from armeval._version import __version__ as __version__
