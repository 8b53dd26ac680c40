"""The folder service."""
