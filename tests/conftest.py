"""What all tests share."""

from hypothesis import settings

settings.register_profile("wrywing", deadline=None)  # a busy machine is no fault of the program's
settings.load_profile("wrywing")
