"""The Textual app: one module per pane, small widgets, styles; it computes nothing."""
