"""From an instrument's export to a sealed report of which batches or lines differ."""

__version__ = "0.1.0"
