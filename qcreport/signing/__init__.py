"""Keys, the seal, signatures and their verification."""
