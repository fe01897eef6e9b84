"""Several threads that start at one moment."""

import threading


def at_once(*works, seconds=120):
    """Do works in threads of their own; gives what each returned, or the error it raised."""
    start, given = threading.Barrier(len(works)), [None] * len(works)

    def run(place):
        start.wait(seconds)
        try:
            given[place] = works[place]()
        except Exception as error:
            given[place] = error

    threads = [threading.Thread(target=run, args=(place,)) for place in range(len(works))]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(seconds)
    assert not any(thread.is_alive() for thread in threads)
    return given
