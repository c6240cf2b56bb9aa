"""Where text comes from."""
