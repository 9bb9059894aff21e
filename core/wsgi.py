"""Entry point of web servers."""

import os
from importlib import import_module

from django.conf import settings
from django.core.wsgi import get_wsgi_application
from threadpoolctl import threadpool_limits

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "core.settings")
application = get_wsgi_application()
# The addresses, and with them all that pages need, are loaded before the first request and not while it waits.
import_module(settings.ROOT_URLCONF)
# Threads of linear algebra that wait for one another on busy cores take ten times as long as one alone.
threadpool_limits(limits=1)
