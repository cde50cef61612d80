"""The steps from an empty file to today's tables. A step that has been released is never edited; add the next one."""
