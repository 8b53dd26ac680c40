"""The inbox: listings, readiness, claims, refusals."""
