"""What a run is told as: papers for the wireman, a summary for the screen, JSON for programs.

Every function here takes values and returns text or bytes; `folder` alone touches the disk.
"""
