"""Tests of footcal.calfile."""
