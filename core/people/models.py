"""Users, collaborations and who belongs to which, in what role."""

from typing import Any, ClassVar

from django.contrib.auth.base_user import BaseUserManager
from django.contrib.auth.models import AbstractUser
from django.db import models
from django.urls import reverse


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


class User(AbstractUser):
    """Someone who signs in with an e-mail address."""

    username = None  # type: ignore[assignment]
    first_name = None  # type: ignore[assignment]
    last_name = None  # type: ignore[assignment]
    email = models.EmailField("e-mail address", unique=True)
    name = models.CharField("name", max_length=120, blank=True)
    # When they last looked at the home page, which lists what is new since.
    last_looked_at = models.DateTimeField(null=True, blank=True)

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


class Collaboration(models.Model):
    """The people who share measurements and theories; a lab class is one too."""

    name = models.CharField(max_length=120)
    about = models.TextField(blank=True)
    created_at = models.DateTimeField(auto_now_add=True)
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

    user = models.ForeignKey(User, on_delete=models.CASCADE, related_name="memberships")
    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="memberships")
    role = models.CharField(max_length=10, choices=Role.choices, default=Role.MEMBER)
    joined_at = models.DateTimeField(auto_now_add=True)

    class Meta:
        ordering = ("role", "joined_at")
        constraints = (models.UniqueConstraint(fields=["user", "collaboration"], name="one_role_each"),)

    def __str__(self) -> str:
        return f"{self.user}, {self.role} of {self.collaboration}"
