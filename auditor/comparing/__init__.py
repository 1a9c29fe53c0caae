"""Two audits side by side: what differs, by how much and how surely; knows only their JSON."""
