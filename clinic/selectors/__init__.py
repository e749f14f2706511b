"""All reads: keyword-only or by look-up, scoped to a user; look-up and permission in one call."""
