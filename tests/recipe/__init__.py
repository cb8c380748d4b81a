"""Tests of footcal.recipe."""
