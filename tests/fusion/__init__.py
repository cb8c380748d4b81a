"""Tests of footcal.fusion."""
