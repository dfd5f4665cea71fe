"""The main job: moist air marched over a range, and what reaches each site."""
