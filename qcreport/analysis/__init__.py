"""From measurements, plan and rules to a frozen result."""
