"""Review: verdicts in and out, and how far annotators agree."""
