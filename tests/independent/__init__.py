"""Tests: independent."""
