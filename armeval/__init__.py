"""From joint-level cogging to the tip of the arm.

Files in, answers out::

    trial = armeval.read_trial("trial.toml")
    armeval.measure(trial).to_frame()

The names stand in ``__init__.pyi``, for type checkers and for Python alike; each is imported when it is first used, so
that ``import armeval`` costs nothing.
"""

import lazy_loader

__getattr__, __dir__, __all__ = lazy_loader.attach_stub(__name__, __file__)
