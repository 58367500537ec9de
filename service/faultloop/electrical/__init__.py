"""What physics says: arrays in, arrays out.  Knows no device, no rule, no file, no HTTP."""
