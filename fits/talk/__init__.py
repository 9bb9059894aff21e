"""What people say to each other about theories and assessments, and the e-mails that tell what is new."""
