"""Settings for every test."""

from hypothesis import settings

# The first example of a test pays for imports, and machines differ: time is a matter for
# tests/bench, not for property tests.
settings.register_profile("contactlogic", deadline=None)
settings.load_profile("contactlogic")
