"""Secrets of links stay out of logs."""

import pytest

from core.masking import masked

SECRET = "abcDEF_123-456"


@pytest.mark.parametrize(
    ("said", "shown"),
    [
        (f"Not Found: /i/{SECRET}/", "Not Found: /i/…/"),
        (f"Not Found: /r/{SECRET}/charts/ball.svg", "Not Found: /r/…/charts/ball.svg"),
        (f"GET /accounts/login/?next=/i/{SECRET}/", "GET /accounts/login/?next=/i/…/"),
        (f"GET /accounts/login/?next=%2Fi%2F{SECRET}%2F", "GET /accounts/login/?next=%2Fi%2F…%2F"),
        ("GET /collaborations/12/people", "GET /collaborations/12/people"),
    ],
)
def test_secrets_are_masked_wherever_an_address_is_said(said: str, shown: str) -> None:
    assert masked(said) == shown
