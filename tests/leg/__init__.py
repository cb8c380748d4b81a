"""Tests of footcal.leg."""
