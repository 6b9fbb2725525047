"""The places of the window. None knows another."""
