import os

from nearchord_service.work.local import kernel_cache

os.environ.update(kernel_cache.prepare("nearchord_solve", os.environ))  # before anything imports numba
