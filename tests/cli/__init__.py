"""Tests of footcal.cli."""
