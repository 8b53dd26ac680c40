"""Render, seal, publish, record: the steps that make a report exist."""
