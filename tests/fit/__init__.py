"""Tests of footcal.fit."""
