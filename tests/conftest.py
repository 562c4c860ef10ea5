"""Tests and docstring examples leave the user's cache folder alone."""

import os

os.environ["EDGEPLAN_CACHE"] = "0"
