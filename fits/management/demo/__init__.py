"""The made-up scenario that `manage.py demo` shows."""
