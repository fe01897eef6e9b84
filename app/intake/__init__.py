"""Reading of release files. The door is `app.intake.reading`."""
