"""Tests of footcal.files."""
