"""Benchmarks: ratios in one run, never timed tests."""
