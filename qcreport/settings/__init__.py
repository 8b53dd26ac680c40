"""A site's folders and settings files."""
