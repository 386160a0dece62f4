"""Puts the shared strategies of this folder on the import path of every test; random tests repeat from run to run."""

from hypothesis import settings

settings.register_profile("repeatable", deadline=None, derandomize=True)
settings.load_profile("repeatable")
