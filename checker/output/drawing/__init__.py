"""Draw a hull: one-line drawing, coordination plots, voltage plots, and the trunk as Mermaid text."""
