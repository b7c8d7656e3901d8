"""Measurements that fill tables in `results/`; run by hand."""
