"""Is it true? A plan file is proved again from its own text, by code that no finder shares."""
