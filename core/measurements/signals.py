"""What upper layers are told of measurements, inside the transaction of the change itself."""

from django.dispatch import Signal

# release: the Release, just published; by: the User who published it.
release_published = Signal()
# release: the Release, just withdrawn; by: the User who withdrew it.
release_withdrawn = Signal()
# measurement: the Measurement, whose data are seen from now on; by: the User who opened it, None at its time.
measurement_opened = Signal()
