"""Which logs are allowed, and which is worst for each check."""
