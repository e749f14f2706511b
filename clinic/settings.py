"""Settings from the environment, failing closed.

``EBBLINE_DEMO=1`` is the demo: plain HTTP on this machine only. Without it cookies need TLS, hosts
must be named, and anything unsafe refuses to start. There is no debug switch.
"""

import os

from django.core.exceptions import ImproperlyConfigured

from clinic import local

BASE_DIR = local.ROOT
DEMO = os.environ.get("EBBLINE_DEMO") == "1"
DEBUG = False
SECRET_KEY = local.secret("secret.key", "EBBLINE_SECRET_KEY")
LEDGER_KEY = local.secret("ledger.key", "EBBLINE_LEDGER_KEY")

ALLOWED_HOSTS = [
    host.strip()
    for host in os.environ.get("EBBLINE_HOSTS", "127.0.0.1,localhost").split(",")
    if host.strip()
]
if not ALLOWED_HOSTS or any("*" in host or host.startswith(".") for host in ALLOWED_HOSTS):
    raise ImproperlyConfigured(
        f"EBBLINE_HOSTS is {os.environ.get('EBBLINE_HOSTS')!r}; allowed: whole host names "
        "separated by commas, because a wildcard lets any site pose as this one. Name the host."
    )
if DEMO and any(host not in {"127.0.0.1", "localhost"} for host in ALLOWED_HOSTS):
    raise ImproperlyConfigured(
        "EBBLINE_DEMO=1 with another host than 127.0.0.1: the demo has no TLS and stays on this "
        "machine. Unset EBBLINE_DEMO for a clinic's own network."
    )

INSTALLED_APPS = [
    "django.contrib.auth",
    "django.contrib.contenttypes",
    "django.contrib.sessions",
    "django.contrib.messages",
    "django.contrib.staticfiles",
    "axes",
    "clinic",
]
MIDDLEWARE = [
    "django.middleware.security.SecurityMiddleware",
    "clinic.middleware.headers.HeadersMiddleware",
    "whitenoise.middleware.WhiteNoiseMiddleware",
    "clinic.middleware.errors.ErrorIdMiddleware",
    "django.contrib.sessions.middleware.SessionMiddleware",
    "django.middleware.common.CommonMiddleware",
    "django.middleware.csrf.CsrfViewMiddleware",
    "django.contrib.auth.middleware.AuthenticationMiddleware",
    "clinic.middleware.idle.IdleMiddleware",
    "clinic.middleware.sign_in.SignInMiddleware",
    "django.contrib.messages.middleware.MessageMiddleware",
    "django.middleware.clickjacking.XFrameOptionsMiddleware",
    "axes.middleware.AxesMiddleware",
]
ROOT_URLCONF = "clinic.urls"
WSGI_APPLICATION = "clinic.wsgi.application"
TEMPLATES = [
    {
        "BACKEND": "django.template.backends.django.DjangoTemplates",
        "DIRS": [BASE_DIR / "templates"],
        "OPTIONS": {
            "context_processors": [
                "django.template.context_processors.request",
                "django.contrib.auth.context_processors.auth",
                "django.contrib.messages.context_processors.messages",
                "clinic.templatetags.page.page",
            ],
            "builtins": ["django.templatetags.static", "clinic.templatetags.ebbline"],
            "loaders": [
                (
                    "django.template.loaders.cached.Loader",
                    ["django.template.loaders.filesystem.Loader"],
                )
            ],
        },
    }
]

DATABASES = {"default": local.database()}
DEFAULT_AUTO_FIELD = "django.db.models.BigAutoField"

AUTH_USER_MODEL = "clinic.User"
AUTHENTICATION_BACKENDS = [
    "axes.backends.AxesStandaloneBackend",
    "django.contrib.auth.backends.ModelBackend",
]
PASSWORD_HASHERS = [
    "django.contrib.auth.hashers.Argon2PasswordHasher",
    "django.contrib.auth.hashers.PBKDF2PasswordHasher",
]
AUTH_PASSWORD_VALIDATORS = [
    {
        "NAME": "django.contrib.auth.password_validation.MinimumLengthValidator",
        "OPTIONS": {"min_length": 12},
    },
    {"NAME": "django.contrib.auth.password_validation.CommonPasswordValidator"},
    {"NAME": "django.contrib.auth.password_validation.UserAttributeSimilarityValidator"},
]
AXES_LOCKOUT_PARAMETERS = [["username", "ip_address"]]
AXES_FAILURE_LIMIT = 5
AXES_COOLOFF_TIME = 0.25  # hours
AXES_RESET_ON_SUCCESS = True
AXES_LOCKOUT_CALLABLE = "clinic.views.accounts.held"
AXES_VERBOSE = False
LOGIN_URL = "sign_in"
LOGIN_REDIRECT_URL = "home"

# A shift long; idleness is judged apart by a signed cookie, so that a GET never writes.
SESSION_COOKIE_AGE = 12 * 60 * 60
SESSION_EXPIRE_AT_BROWSER_CLOSE = True
SESSION_COOKIE_HTTPONLY = True
SESSION_COOKIE_SAMESITE = "Strict"
CSRF_COOKIE_SAMESITE = "Strict"
CSRF_COOKIE_HTTPONLY = True
CSRF_USE_SESSIONS = False
CSRF_FAILURE_VIEW = "clinic.views.errors.csrf_failure"
IDLE_SECONDS = 30 * 60
IDLE_WARN_SECONDS = 5 * 60

SESSION_COOKIE_SECURE = CSRF_COOKIE_SECURE = not DEMO
SECURE_SSL_REDIRECT = not DEMO
SECURE_HSTS_SECONDS = 0 if DEMO else 31_536_000
SECURE_HSTS_INCLUDE_SUBDOMAINS = not DEMO
SECURE_HSTS_PRELOAD = not DEMO
SECURE_CROSS_ORIGIN_OPENER_POLICY = "same-origin"
SECURE_REFERRER_POLICY = "same-origin"
X_FRAME_OPTIONS = "DENY"
# Name and shape of Django 6's own setting, so that the upgrade is a deletion. The hash is that of
# the empty style element the chart library inserts; no 'unsafe-inline', no 'unsafe-eval'.
SECURE_CSP = {
    "default-src": ["'none'"],
    "script-src": ["'self'"],
    "style-src": ["'self'", "'sha256-47DEQpj8HBSa+/TImW+5JCeuQeRkm5NMpJWZG3hSuFU='"],
    "img-src": ["'self'", "data:", "blob:"],
    "font-src": ["'self'"],
    "connect-src": ["'self'"],
    "form-action": ["'self'"],
    "base-uri": ["'none'"],
    "frame-ancestors": ["'none'"],
}

LANGUAGE_CODE = "en"
USE_I18N = False
TIME_ZONE = os.environ.get("EBBLINE_TIME_ZONE", "UTC")
USE_TZ = True
DATE_INPUT_FORMATS = ["%Y-%m-%d"]
FORMAT_MODULE_PATH = ["clinic.formats"]

STATIC_URL = "/static/"
# Served from where they lie: nothing to collect, nothing from outside.
STATIC_ROOT = None
WHITENOISE_USE_FINDERS = True
WHITENOISE_AUTOREFRESH = False
WHITENOISE_MAX_AGE = 300

DATA_UPLOAD_MAX_MEMORY_SIZE = 2_500_000
DATA_UPLOAD_MAX_NUMBER_FIELDS = 2_000
FILE_UPLOAD_MAX_MEMORY_SIZE = 2_500_000

# No values in logs: only the level, the logger and our own sentences with error ids.
LOGGING = {
    "version": 1,
    "disable_existing_loggers": False,
    "filters": {"no_values": {"()": "clinic.middleware.errors.NoValues"}},
    "formatters": {"plain": {"format": "{asctime} {levelname} {name} {message}", "style": "{"}},
    "handlers": {
        "stderr": {
            "class": "logging.StreamHandler",
            "formatter": "plain",
            "filters": ["no_values"],
        }
    },
    "root": {"handlers": ["stderr"], "level": "WARNING"},
    "loggers": {
        "django": {"handlers": ["stderr"], "level": "WARNING", "propagate": False},
        "axes": {"handlers": ["stderr"], "level": "ERROR", "propagate": False},
    },
}
