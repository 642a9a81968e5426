"""From the queue to the slots and back: leases, hand-over, results, heartbeats, and the upkeep of the queue."""

from nearchord_service.dispatch.dispatcher import Dispatcher
from nearchord_service.dispatch.observer import DispatchObserver
from nearchord_service.dispatch.upkeep import Upkeep

__all__ = ["DispatchObserver", "Dispatcher", "Upkeep"]
