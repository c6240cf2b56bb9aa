"""What a desk is sent by cron."""
