"""What a set of wiring rules asks: data first, one TOML a rule set and edition, and one loader."""
