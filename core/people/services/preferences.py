"""What someone wants for themselves."""

from core.people.models import DigestPace, User


def set_preferences(*, user: User, name: str, digest: str) -> None:
    """Their name, as others read it, and how often an e-mail tells what is new."""
    user.name, user.digest = name.strip(), DigestPace(digest)
    user.save(update_fields=["name", "digest"])
