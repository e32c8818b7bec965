"""What all tests share."""

from __future__ import annotations

from hypothesis import settings

# The same examples on every run, so that a change is to blame for a failure and not the day. To look for new ones by
# hand: python -m pytest --hypothesis-seed=random --hypothesis-profile=searching
settings.register_profile("steady", derandomize=True, deadline=None)
settings.register_profile("searching", deadline=None, max_examples=1000)
settings.load_profile("steady")
