"""Property tests run without a deadline: the first example pays for imports."""

from hypothesis import settings

settings.register_profile("no deadline", deadline=None)
settings.load_profile("no deadline")
