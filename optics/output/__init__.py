"""Writing only: tables, result folders, figures and what the screen shows. Nothing is computed here."""
