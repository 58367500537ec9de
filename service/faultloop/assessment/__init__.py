"""The job: measured points -> quantities -> findings -> verdict."""
