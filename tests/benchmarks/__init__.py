"""Tests: benchmarks."""
