"""Tests of footcal; they mirror the source tree."""
