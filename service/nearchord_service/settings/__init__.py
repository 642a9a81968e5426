"""What a server is told: by its command line, else by its environment, else by defaults."""

from nearchord_service.settings.options import read_settings
from nearchord_service.settings.values import Address, Settings

__all__ = ["Address", "Settings", "read_settings"]
