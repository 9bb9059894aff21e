"""All settings. Each that an installation may want to change is read from the environment."""

import contextlib
import hashlib
import os
import secrets
import tempfile
from pathlib import Path

import dj_database_url

BASE_DIR = Path(__file__).resolve().parent.parent


def flag(name: str, default: bool = False) -> bool:
    """A yes-or-no environment variable."""
    return os.environ.get(name, str(default)).strip().lower() in {"1", "true", "yes", "on"}


def listed(name: str, default: str = "") -> list[str]:
    """A comma-separated environment variable."""
    return [part.strip() for part in os.environ.get(name, default).split(",") if part.strip()]


# What the running site writes: the embedded database, the embedded Redis, the secret key, compiled kernels.
HOME = Path(os.environ.get("INRADIUS_HOME", BASE_DIR / "var")).resolve()
HOME.mkdir(parents=True, exist_ok=True, mode=0o700)
# Numba reads this when it is first imported. The code's own folder may be read-only.
os.environ.setdefault("NUMBA_CACHE_DIR", str(HOME / "compiled"))


def own_secret_key() -> str:
    """The key kept in HOME, made on first use, so that a single machine needs no configuration."""
    path = HOME / "secret_key"
    if not path.exists():
        draft = HOME / f"secret_key.{os.getpid()}"
        draft.touch(mode=0o600)
        draft.write_text(secrets.token_urlsafe(50))
        # A link appears whole or not at all: of processes that start together the first one wins.
        with contextlib.suppress(FileExistsError):
            path.hardlink_to(draft)
        draft.unlink()
    return path.read_text()


def socket_path() -> Path:
    """Where the embedded Redis listens: in HOME, or in a short folder where HOME is too long for a socket."""
    path = HOME / "redis.sock"
    if len(os.fsencode(path)) < 100:
        return path
    mark = hashlib.sha256(os.fsencode(HOME)).hexdigest()[:12]
    return Path(tempfile.gettempdir()) / f"inradius-{os.getuid()}-{mark}" / "redis.sock"


DEBUG = flag("INRADIUS_DEBUG")
SECRET_KEY = os.environ.get("INRADIUS_SECRET_KEY") or own_secret_key()
ALLOWED_HOSTS = listed("INRADIUS_HOSTS", "localhost,127.0.0.1,[::1]")
CSRF_TRUSTED_ORIGINS = listed("INRADIUS_ORIGINS")

INSTALLED_APPS = [
    "django.contrib.auth",
    "django.contrib.contenttypes",
    "django.contrib.sessions",
    "django.contrib.messages",
    "django.contrib.staticfiles",
    "django.contrib.humanize",
    "allauth",
    "allauth.account",
    "django_htmx",
    "core",
    "core.people",
    "core.measurements",
    "core.theories",
    "fits",
    "fits.assessments",
    "fits.reports",
    "fits.talk",
    "fits.overviews",
]

MIDDLEWARE = [
    "django.middleware.security.SecurityMiddleware",
    "whitenoise.middleware.WhiteNoiseMiddleware",
    "core.content_security.ContentSecurityMiddleware",
    "core.private_pages.PrivatePagesMiddleware",
    "core.body_limit.BodyLimitMiddleware",
    "django.contrib.sessions.middleware.SessionMiddleware",
    "django.middleware.common.CommonMiddleware",
    "django.middleware.csrf.CsrfViewMiddleware",
    "django.contrib.auth.middleware.AuthenticationMiddleware",
    "django.contrib.messages.middleware.MessageMiddleware",
    "django.middleware.clickjacking.XFrameOptionsMiddleware",
    "allauth.account.middleware.AccountMiddleware",
    "django_htmx.middleware.HtmxMiddleware",
    "core.errors.ErrorMiddleware",
]

ROOT_URLCONF = "core.urls"
WSGI_APPLICATION = "core.wsgi.application"
DEFAULT_AUTO_FIELD = "django.db.models.BigAutoField"

TEMPLATES = [
    {
        "BACKEND": "django.template.backends.django.DjangoTemplates",
        "DIRS": [BASE_DIR / "templates"],
        "APP_DIRS": True,
        "OPTIONS": {
            "context_processors": [
                "django.template.context_processors.request",
                "django.contrib.auth.context_processors.auth",
                "django.contrib.messages.context_processors.messages",
            ],
        },
    }
]

# ---- Database: SQLite by default, PostgreSQL by DATABASE_URL ----
DATABASES = {"default": dj_database_url.config(default=f"sqlite:///{HOME / 'inradius.sqlite3'}")}
if DATABASES["default"]["ENGINE"] == "django.db.backends.sqlite3":
    # IMMEDIATE and WAL together: either alone fails under writers from several processes.
    DATABASES["default"]["OPTIONS"] = {
        "transaction_mode": "IMMEDIATE",
        "timeout": 20,
        "init_command": "PRAGMA journal_mode=WAL; PRAGMA synchronous=NORMAL;",
    }
    # A file, not memory: browser and worker tests open the database from other processes.
    DATABASES["default"]["TEST"] = {"NAME": HOME / "test.sqlite3"}

# ---- Sign-in ----
AUTH_USER_MODEL = "people.User"
AUTHENTICATION_BACKENDS = ["allauth.account.auth_backends.AuthenticationBackend"]
LOGIN_URL = "account_login"
LOGIN_REDIRECT_URL = "overviews:home"
ACCOUNT_ADAPTER = "core.people.sign_in.AccountAdapter"
ACCOUNT_USER_MODEL_USERNAME_FIELD = None
ACCOUNT_LOGIN_METHODS = {"email"}
ACCOUNT_SIGNUP_FIELDS = ["email*", "password1*", "password2*"]
ACCOUNT_EMAIL_VERIFICATION = "none"
ACCOUNT_SESSION_REMEMBER = True
ACCOUNT_LOGOUT_ON_GET = False
# A class that begins together has one address.
ACCOUNT_RATE_LIMITS = {"signup": "60/m/ip", "login": "60/m/ip"}
AUTH_PASSWORD_VALIDATORS = [
    {"NAME": "django.contrib.auth.password_validation.MinimumLengthValidator", "OPTIONS": {"min_length": 10}},
    {"NAME": "django.contrib.auth.password_validation.CommonPasswordValidator"},
    {"NAME": "django.contrib.auth.password_validation.NumericPasswordValidator"},
]
PASSWORD_RESET_TIMEOUT = 7 * 24 * 3600

EMAIL_BACKEND = os.environ.get("INRADIUS_EMAIL_BACKEND", "django.core.mail.backends.console.EmailBackend")
EMAIL_HOST = os.environ.get("INRADIUS_EMAIL_HOST", "localhost")
EMAIL_PORT = int(os.environ.get("INRADIUS_EMAIL_PORT", "25"))
EMAIL_HOST_USER = os.environ.get("INRADIUS_EMAIL_USER", "")
EMAIL_HOST_PASSWORD = os.environ.get("INRADIUS_EMAIL_PASSWORD", "")
EMAIL_USE_TLS = flag("INRADIUS_EMAIL_TLS")
DEFAULT_FROM_EMAIL = os.environ.get("INRADIUS_EMAIL_FROM", "inradius@localhost")
EMAIL_TIMEOUT = 20  # seconds; a mail server that is away holds nobody up
# Where people reach the site, for the addresses in e-mails that no request of theirs asks for.
SITE_URL = os.environ.get("INRADIUS_URL", "http://localhost:8000/").rstrip("/")

# ---- Jobs ----
# REDIS_URL names a service; without it the socket is that of the Redis which core.broker starts.
REDIS_SOCKET = socket_path()
REDIS_URL = os.environ.get("REDIS_URL", "")
CELERY_BROKER_URL = REDIS_URL or f"redis+socket://{REDIS_SOCKET}"
CELERY_TASK_ALWAYS_EAGER = False
CELERY_TASK_ACKS_LATE = True
CELERY_TASK_REJECT_ON_WORKER_LOST = True
CELERY_TASK_IGNORE_RESULT = True
CELERY_TASK_SOFT_TIME_LIMIT = 3300
CELERY_TASK_TIME_LIMIT = 3600
CELERY_WORKER_PREFETCH_MULTIPLIER = 1
CELERY_WORKER_SOFT_SHUTDOWN_TIMEOUT = 30
CELERY_WORKER_MAX_TASKS_PER_CHILD = 50
CELERY_WORKER_MAX_MEMORY_PER_CHILD = 1_500_000  # kB
CELERY_WORKER_HIJACK_ROOT_LOGGER = False
CELERY_WORKER_PROC_ALIVE_TIMEOUT = 60
CELERY_BROKER_CONNECTION_RETRY_ON_STARTUP = True
# The shortest of the three visibility time-outs wins, so that all three are set.
CELERY_VISIBILITY_TIMEOUT = 7200
CELERY_BROKER_TRANSPORT_OPTIONS = {
    "visibility_timeout": 7200,
    "unacked_restore_interval": 10,
    "socket_timeout": 30,
    "socket_connect_timeout": 5,
    # A page that hands over a job does not wait for a broker that is away; workers go on trying all the same.
    "max_retries": 1,
    "interval_start": 0,
    "interval_step": 0.1,
    "interval_max": 0.1,
    "health_check_interval": 25,
}
CELERY_RESULT_BACKEND_TRANSPORT_OPTIONS = {"visibility_timeout": 7200}
CELERY_BEAT_SCHEDULE_FILENAME = str(HOME / "schedule")
# Those that come often expire, so that they do not pile up while every worker process is busy.
CELERY_BEAT_SCHEDULE = {
    "sweep": {"task": "fits.assessments.tasks.sweep", "schedule": 30.0, "options": {"expires": 30.0}},
    "openings": {
        "task": "fits.assessments.tasks.note_openings",
        "schedule": 30.0,
        "options": {"expires": 30.0},
    },
    "canary": {"task": "fits.assessments.tasks.canary", "schedule": 60.0, "options": {"expires": 60.0}},
    "digests": {"task": "fits.talk.tasks.send_digests", "schedule": 3600.0, "options": {"expires": 3600.0}},
}
# A worker that has neither sung (the canary) nor got on with an assessment for so long hangs.
WORKER_ALIVE_FILE = HOME / "worker-alive"
WORKER_SILENCE_SECONDS = 180
# An assessment that nobody picked up for so long is enqueued again: its message may be lost.
ASSESSMENT_PICK_UP_SECONDS = 20
# An assessment whose worker has been silent for so long is taken to be lost.
ASSESSMENT_LEASE_SECONDS = 120
ASSESSMENT_MAX_ATTEMPTS = 3

# ---- Uploads ----
UPLOAD_MAX_BYTES = 50 * 1024 * 1024
DATA_UPLOAD_MAX_MEMORY_SIZE = 2 * 1024 * 1024
FILE_UPLOAD_MAX_MEMORY_SIZE = 2 * 1024 * 1024  # larger files stream to a temporary file
# A release's table, covariance and windows, with the words that go with them.
REQUEST_MAX_BYTES = 3 * UPLOAD_MAX_BYTES + DATA_UPLOAD_MAX_MEMORY_SIZE

# ---- Files ----
STATIC_URL = "static/"
STATIC_ROOT = BASE_DIR / "staticfiles"
# WhiteNoise warns of a folder that is not there; where the code is read-only, `collectstatic` has made it.
with contextlib.suppress(OSError):
    STATIC_ROOT.mkdir(exist_ok=True)
# Without a `collectstatic` step WhiteNoise serves the files from where they stand.
WHITENOISE_USE_FINDERS = True
STORAGES = {
    "default": {"BACKEND": "django.core.files.storage.FileSystemStorage"},
    "staticfiles": {"BACKEND": "django.contrib.staticfiles.storage.StaticFilesStorage"},
}

# ---- Safety ----
# plotly.js sets style attributes on its SVG through the object model, which the policy allows; its style
# sheet is served as a file, so that no 'unsafe-inline' is needed.
SECURE_CSP = {
    "default-src": ["'none'"],
    "script-src": ["'self'"],
    "style-src": ["'self'"],
    "img-src": ["'self'", "data:", "blob:"],
    "font-src": ["'self'"],
    "connect-src": ["'self'"],
    "form-action": ["'self'"],
    "frame-ancestors": ["'none'"],
    "base-uri": ["'none'"],
}
SECURE_CONTENT_TYPE_NOSNIFF = True
SECURE_REFERRER_POLICY = "same-origin"
X_FRAME_OPTIONS = "DENY"
HTTPS = flag("INRADIUS_HTTPS")
SESSION_COOKIE_SECURE = CSRF_COOKIE_SECURE = HTTPS
SESSION_COOKIE_HTTPONLY = True
CSRF_COOKIE_HTTPONLY = True
if HTTPS:
    SECURE_PROXY_SSL_HEADER = ("HTTP_X_FORWARDED_PROTO", "https")
    # Else all people have the proxy's address, and few wrong passwords keep everybody out for a minute.
    ALLAUTH_TRUSTED_PROXY_COUNT = 1
    SECURE_HSTS_SECONDS = 31_536_000

# ---- Language and time ----
LANGUAGE_CODE = "en"
TIME_ZONE = os.environ.get("INRADIUS_TIME_ZONE", "UTC")
USE_I18N = False
USE_TZ = True

LOGGING = {
    "version": 1,
    "disable_existing_loggers": False,
    "formatters": {"line": {"format": "{asctime} {levelname} {name} {message}", "style": "{"}},
    "filters": {"share_links": {"()": "core.masking.MaskShareLinks"}},
    "handlers": {
        "console": {"class": "logging.StreamHandler", "formatter": "line", "filters": ["share_links"]},
    },
    "loggers": {
        "core": {"handlers": ["console"], "level": "INFO", "propagate": False},
        "fits": {"handlers": ["console"], "level": "INFO", "propagate": False},
    },
}
MESSAGE_STORAGE = "django.contrib.messages.storage.session.SessionStorage"
