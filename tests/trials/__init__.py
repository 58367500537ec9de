"""Long trials, each bounded: run by `make trials`, not by every change."""
