"""Mirrors windctl/; beside it firmware, newcomer and benchmarks."""
