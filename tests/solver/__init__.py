"""Tests: solver."""
