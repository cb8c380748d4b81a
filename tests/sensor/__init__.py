"""Tests of footcal.sensor."""
