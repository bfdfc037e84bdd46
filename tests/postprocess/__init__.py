"""Tests: postprocess."""
