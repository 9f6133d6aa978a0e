"""The page's drawings, by matplotlib, as SVG that takes its colours from the page."""
