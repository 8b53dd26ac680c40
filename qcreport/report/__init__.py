"""From a result to the pages of the report."""
