"""What a desk is told of its stories."""
