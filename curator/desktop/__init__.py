"""The window: thin, and the only room that imports Qt."""
