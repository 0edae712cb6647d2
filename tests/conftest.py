"""Settings that all tests share."""

from hypothesis import settings

# The same examples on every machine and in every run, and no test that depends on the clock.
settings.register_profile("rlc", deadline=None, derandomize=True, max_examples=60)
settings.load_profile("rlc")
