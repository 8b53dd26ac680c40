"""One export through all stages."""
