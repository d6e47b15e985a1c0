"""What holds for all tests: drawn examples are the same every time, and compiling a kernel may take its time."""

from hypothesis import settings

settings.register_profile("armeval", deadline=None, derandomize=True)
settings.load_profile("armeval")
