"""Sheets: what lies over a pane for a moment, under the strip."""
