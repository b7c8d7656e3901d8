"""Errors, exact arithmetic, the guarded solver call, stopping rules: what every floor stands on."""
