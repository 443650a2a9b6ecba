"""Optical constants with their sources."""
