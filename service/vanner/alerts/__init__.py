"""What a desk is told of its stories."""

from vanner.alerts.mail import compose_alert

__all__ = ["compose_alert"]
