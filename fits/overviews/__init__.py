"""The pages that are read: home, collaboration, measurement, theory."""
