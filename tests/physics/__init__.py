"""Tests of footcal.physics."""
