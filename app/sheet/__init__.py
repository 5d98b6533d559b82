"""The handover sheet: what it says (`content`, without Qt), its chart's data, and how it is printed."""
