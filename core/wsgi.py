"""Entry point of web servers."""

import os
from importlib import import_module

from django.conf import settings
from django.core.wsgi import get_wsgi_application

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "core.settings")
application = get_wsgi_application()
# The addresses, and with them all that pages need, are loaded before the first request and not while it waits.
import_module(settings.ROOT_URLCONF)
