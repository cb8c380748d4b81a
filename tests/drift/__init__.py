"""Tests of footcal.drift."""
