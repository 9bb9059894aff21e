"""Users, collaborations and who belongs to which, in what role."""

from typing import Any, ClassVar, NoReturn

from django.contrib.auth.base_user import BaseUserManager
from django.contrib.auth.models import AbstractUser
from django.db import models
from django.urls import reverse
from django.utils import timezone


class UserManager(BaseUserManager["User"]):
    """Makes users that are known by their e-mail address."""

    def create_user(self, email: str, password: str | None = None, **fields: Any) -> "User":
        """A user; without a password none can sign in until one is set by e-mail."""
        if not email:
            raise ValueError("a user needs an e-mail address")
        user = self.model(email=self.normalize_email(email).lower(), **fields)
        user.set_password(password)
        user.save(using=self._db)
        return user

    def create_superuser(self, email: str, password: str | None = None, **fields: Any) -> "User":
        """An administrator of the installation."""
        return self.create_user(email, password, is_staff=True, is_superuser=True, **fields)


class DigestPace(models.TextChoices):
    """How often someone wants an e-mail of what is new."""

    NEVER = "never", "never"
    DAILY = "daily", "at most once a day"
    WEEKLY = "weekly", "at most once a week"


class User(AbstractUser):
    """Someone who signs in with an e-mail address."""

    username = None  # type: ignore[assignment]
    first_name = None  # type: ignore[assignment]
    last_name = None  # type: ignore[assignment]
    email = models.EmailField("e-mail address", unique=True)
    name = models.CharField("name", max_length=120, blank=True)
    # When they last looked at the home page, which lists what is new since.
    last_looked_at = models.DateTimeField(null=True, blank=True)
    # How often an e-mail tells what is new, and when the last one was sent.
    digest = models.CharField(max_length=6, choices=DigestPace.choices, default=DigestPace.DAILY)
    digest_sent_at = models.DateTimeField(null=True, blank=True)

    USERNAME_FIELD = "email"
    REQUIRED_FIELDS: ClassVar[list[str]] = []
    objects: ClassVar[UserManager] = UserManager()  # type: ignore[assignment]

    def __str__(self) -> str:
        # Reports show it to people outside: never a whole address.
        return self.name or self.email.partition("@")[0]

    def get_full_name(self) -> str:
        return str(self)

    def get_short_name(self) -> str:
        return str(self)


class Role(models.TextChoices):
    """What someone is in a collaboration."""

    LEAD = "lead", "lead"
    MEMBER = "member", "member"
    STUDENT = "student", "student"
    OBSERVER = "observer", "observer"


class Collaboration(models.Model):
    """The people who share measurements and theories; a lab class is one too."""

    name = models.CharField(max_length=120)
    about = models.TextField(blank=True)
    created_at = models.DateTimeField(auto_now_add=True)
    # Raised with every change of the words: who saves an older state is told so.
    revision = models.PositiveIntegerField(default=0)
    members: "models.ManyToManyField[User, Membership]" = models.ManyToManyField(
        User, through="Membership", related_name="collaborations"
    )

    class Meta:
        ordering = ("name", "pk")

    def __str__(self) -> str:
        return self.name

    def get_absolute_url(self) -> str:
        return reverse("overviews:collaboration", args=[self.pk])


class Membership(models.Model):
    """A user's role in a collaboration."""

    COLLABORATION_PATH = "collaboration"

    class CameBy(models.TextChoices):
        START = "start", "started it"
        ADDED = "added", "added"
        MAIL = "mail", "invited by e-mail"
        LINK = "link", "by an invitation link"

    user = models.ForeignKey(User, on_delete=models.CASCADE, related_name="memberships")
    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="memberships")
    role = models.CharField(max_length=10, choices=Role.choices, default=Role.MEMBER)
    joined_at = models.DateTimeField(auto_now_add=True)
    # An address is proven for those alone who were invited at it by e-mail.
    came_by = models.CharField(max_length=6, choices=CameBy.choices, default=CameBy.ADDED)

    class Meta:
        ordering = ("role", "joined_at")
        constraints = (models.UniqueConstraint(fields=["user", "collaboration"], name="one_role_each"),)

    def __str__(self) -> str:
        return f"{self.user}, {self.role} of {self.collaboration}"


class Invitation(models.Model):
    """A link by which someone joins. Only the hash of its secret is kept."""

    COLLABORATION_PATH = "collaboration"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="invitations")
    token_sha256 = models.CharField(max_length=64, unique=True)
    role = models.CharField(max_length=10, choices=Role.choices, default=Role.MEMBER)
    # Where it was sent; empty for a link that its maker hands on.
    email = models.EmailField(blank=True)
    label = models.CharField(max_length=80, blank=True)
    is_for_many = models.BooleanField(default=False)
    created_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    created_at = models.DateTimeField(auto_now_add=True)
    expires_at = models.DateTimeField()
    revoked_at = models.DateTimeField(null=True, blank=True)
    uses = models.PositiveIntegerField(default=0)
    last_used_at = models.DateTimeField(null=True, blank=True)

    class Meta:
        ordering = ("-created_at", "-pk")

    def __str__(self) -> str:
        return self.email or self.label or f"link {self.pk}"

    @property
    def is_open(self) -> bool:
        """Whether someone may still join by it."""
        is_used_up = self.uses > 0 and not self.is_for_many
        return self.revoked_at is None and self.expires_at > timezone.now() and not is_used_up


class AppendOnly(models.QuerySet["LogEntry"]):
    """Rows that are written once."""

    def update(self, **kwargs: Any) -> NoReturn:
        raise TypeError("the log is append-only")

    def delete(self) -> NoReturn:
        raise TypeError("the log is append-only")


class LogEntry(models.Model):
    """Who did what, and when. Written once, never changed; `core.people.log.record` writes it."""

    COLLABORATION_PATH = "collaboration"
    DESK_PATH = "desk"
    SEAL_PATH = "hidden_with"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.PROTECT, related_name="log")
    at = models.DateTimeField(default=timezone.now)
    who = models.ForeignKey(User, on_delete=models.PROTECT, null=True, related_name="log")  # None: by itself
    deed = models.CharField(max_length=40)  # a Deed of core.people.log
    about = models.CharField(max_length=300)
    url = models.CharField(max_length=300, blank=True)
    detail = models.JSONField(default=dict)
    # The student's desk at which it was done: only they and the leads see it.
    desk = models.ForeignKey(User, on_delete=models.PROTECT, null=True, related_name="+")
    # Tells something of this measurement's data: hidden while they are.
    hidden_with = models.ForeignKey(
        "measurements.Measurement", on_delete=models.PROTECT, null=True, related_name="+"
    )

    objects = AppendOnly.as_manager()

    class Meta:
        ordering = ("-at", "-pk")
        indexes = (models.Index(fields=["collaboration", "-at"], name="log_of_a_collaboration"),)

    def __str__(self) -> str:
        return f"{self.at:%Y-%m-%d %H:%M} {self.deed}: {self.about}"

    def save(self, *args: Any, **kwargs: Any) -> None:
        """Write it once."""
        if not self._state.adding:
            raise TypeError("the log is append-only")
        super().save(*args, **kwargs)

    def delete(self, *args: Any, **kwargs: Any) -> NoReturn:
        """Nothing is taken out of the log."""
        raise TypeError("the log is append-only")
