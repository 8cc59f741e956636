"""Settings of all tests."""

from hypothesis import settings

# No deadline: the first example of a test also pays for imports. No database: tests leave
# nothing behind.
settings.register_profile("pairing", deadline=None, database=None, max_examples=60)
settings.load_profile("pairing")
