"""Documents and plots made from answers."""
