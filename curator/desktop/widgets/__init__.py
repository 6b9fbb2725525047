"""What several places share: panes, sheets, charts."""
