"""Words in, words out: request and answer bodies, file columns, and their mapping to points."""
