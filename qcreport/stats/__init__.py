"""Pure numerics for one-way comparisons; imports no other room and does no input or output."""
