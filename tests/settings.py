"""Settings of the tests: the site's, in a home of their own, so that a running site is left alone."""

import os
from pathlib import Path

os.environ.setdefault("INRADIUS_HOME", str(Path(__file__).resolve().parent.parent / "var" / "tests"))

from core.settings import *  # noqa: F403

# Hash at once what is meant to take its time.
PASSWORD_HASHERS = ["django.contrib.auth.hashers.MD5PasswordHasher"]
