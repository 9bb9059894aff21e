"""The Celery application: `celery -A core.worker worker`."""

import os
from typing import Any

from celery import Celery
from celery.signals import worker_init, worker_process_init
from threadpoolctl import threadpool_limits

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "core.settings")

app = Celery("inradius")
app.config_from_object("django.conf:settings", namespace="CELERY")
app.autodiscover_tasks(["fits.assessments", "fits.reports", "fits.talk"])


@worker_init.connect  # type: ignore[untyped-decorator]
def compile_kernels(**_: Any) -> None:
    """Compile once, before the worker forks its processes, and not in someone's first job.

    A process that compiled for itself could take longer than Celery waits for it to come up.
    """
    os.environ.setdefault("NUMBA_NUM_THREADS", "1")
    from fits.engine.draws import warm_up

    warm_up()


@worker_process_init.connect  # type: ignore[untyped-decorator]
def prepare_process(**_: Any) -> None:
    """One thread of linear algebra a process, as they share the cores; no connection of the parent's."""
    from django.db import connections

    threadpool_limits(limits=1)
    connections.close_all()
