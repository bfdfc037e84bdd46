"""Tests: geometry."""
