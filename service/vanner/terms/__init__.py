"""Cuts text into terms."""
