"""The changes that can be made to reports and their links, one function each."""

from fits.reports.services.create_link import create_link
from fits.reports.services.create_report import create_report
from fits.reports.services.revoke_link import revoke_link

__all__ = ["create_link", "create_report", "revoke_link"]
