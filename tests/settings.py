"""Settings of the tests: the site's, in a home of their own, so that a running site is left alone."""

import os
from pathlib import Path

home = Path(os.environ.get("INRADIUS_HOME", Path(__file__).resolve().parent.parent / "var" / "tests"))
# Tests that run side by side (`-n 2`) have a home each, which the processes that they start inherit.
side = os.environ.get("PYTEST_XDIST_WORKER", home.name)
os.environ["INRADIUS_HOME"] = str(home if home.name == side else home / side)

from core.settings import *  # noqa: E402, F403

# Hash at once what is meant to take its time.
PASSWORD_HASHERS = ["django.contrib.auth.hashers.MD5PasswordHasher"]
