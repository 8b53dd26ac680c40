"""One report checked from its own contents."""
