def write_loggers(folder, lines, joints):
    return None
