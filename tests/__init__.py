"""Tests of all rooms."""
