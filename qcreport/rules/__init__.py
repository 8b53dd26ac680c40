"""Facts, the decision table, and the choice of procedure with its trace."""
