"""Hands messages over."""
