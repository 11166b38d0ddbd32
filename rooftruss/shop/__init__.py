"""Take-off: pieces and prices."""
