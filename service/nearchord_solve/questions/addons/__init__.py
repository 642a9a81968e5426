"""What ``independent-set`` can be asked besides its heaviest set, one module each."""
