"""From photo files to readings: one decode of each new photo feeds everything that is known of it."""
