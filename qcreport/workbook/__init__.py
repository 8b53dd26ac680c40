"""Reading an export: bounded scanner, layouts, the reader child."""
