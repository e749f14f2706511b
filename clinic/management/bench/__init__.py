"""What ``manage.py bench`` measures: the engine on many eyes, and the app on many patients.

Nothing here is a test: times depend on the machine. Each figure is printed beside its goal.
"""
