"""A result and axes in, the same axes out. The names stand in ``__init__.pyi``."""

import lazy_loader

__getattr__, __dir__, __all__ = lazy_loader.attach_stub(__name__, __file__)
