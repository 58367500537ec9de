"""What a protective device guarantees.  Knows currents and times, no installation."""
