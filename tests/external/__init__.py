"""Tests: external."""
