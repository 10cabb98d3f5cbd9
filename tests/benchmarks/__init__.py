"""Benchmarks: every figure is a ratio to a yardstick measured in the same run."""
