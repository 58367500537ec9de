"""The graph of a bench: what floats, what is tied to earth and by what, and what changes if one thing changes."""
