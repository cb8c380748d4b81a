"""Files: atomic writes, tables, the bench session's folder, the robot log, truth."""
