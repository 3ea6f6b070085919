"""What the finished coil will measure at 20 degrees C, told from whatever readings there are.

Pure functions over plain floats: the same readings give the same bits on every computer.
"""
