"""The changes that can be made to reports and their links, one function each."""

from fits.reports.services.create_link import create_link
from fits.reports.services.edit_report import discard_report, edit_report
from fits.reports.services.freeze_report import create_report, freeze_report
from fits.reports.services.later_version import start_later_version
from fits.reports.services.open_link import count_opening, try_passphrase
from fits.reports.services.parts import add_part, edit_part, move_part, remove_part, renew_part
from fits.reports.services.print_report import ask_printing, print_again
from fits.reports.services.revoke_link import revoke_link
from fits.reports.services.start_report import start_report

__all__ = [
    "add_part",
    "ask_printing",
    "count_opening",
    "create_link",
    "create_report",
    "discard_report",
    "edit_part",
    "edit_report",
    "freeze_report",
    "move_part",
    "print_again",
    "remove_part",
    "renew_part",
    "revoke_link",
    "start_later_version",
    "start_report",
    "try_passphrase",
]
