"""Benchmarks: ratios in one run, never timed tests."""

import os

# Before numpy is loaded: one core means one core, and the program sets the same.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
