"""The context, the one place where calls are made.

A call takes its turn: one context serves one call at a time. Calls run without Python's global lock, so other
threads go on. Between its steps the library asks for leave to go on; this is where the progress callable is called
and where Ctrl-C ends the work.
"""

from __future__ import annotations

import contextlib
import ctypes
import signal
import threading
from typing import Callable, Optional, Union

from . import _library
from ._layout import text
from ._library import lib
from .errors import BusyError, ClosedError, Status, error
from .records import LogLevel, Verdict

ProgressCallable = Callable[[str, float], object]
LogCallable = Callable[[LogLevel, str], object]

STOP = Verdict.STOP
CONTINUE = Verdict.CONTINUE


class _Listeners:
    """What the library calls. It must not refer to the context: without a cycle a context goes at once when the
    last name of it goes."""

    def __init__(self, progress, log):
        self.progress = progress
        self.log = log
        self.interrupted = False
        self.failure = None
        self.ask = _library.AskProgress(self._ask)
        self.take = _library.TakeLog(self._take)

    def _ask(self, info, _user):
        # Nothing may be raised here: ctypes would print it and go on.
        try:
            if not self.interrupted and self.failure is None and self.progress is not None:
                answer = self.progress(text(info.contents.phase), info.contents.fraction)
                if answer is not None and answer == STOP:
                    return STOP
        except BaseException as failure:  # raised again when the call has returned
            self.failure = failure
        return STOP if self.interrupted or self.failure is not None else CONTINUE

    def _take(self, level, line, _user):
        try:
            if self.log is not None:
                self.log(LogLevel(level), text(line))
        except BaseException as failure:
            self.failure = self.failure or failure


class Context:
    """Log, progress and messages of a piece of work; one for each thread.

    progress   called as progress(phase, fraction) with a text and 0 to 1, in the thread that made the call;
               `picket.STOP` as its answer ends the work with `picket.Stopped`. What it raises ends the work, too,
               and is raised again. Can be changed: `context.progress = ...`
    log        called as log(level, line)
    log_level  the most that is said: 'warning', 'info' or 'detail'

    Problems made without a context make one for themselves. Use it in a `with` statement or `close` it, or let it
    go; what was made with it lives on.
    """

    def __init__(self, progress: Optional[ProgressCallable] = None, log: Optional[LogCallable] = None,
                 log_level: Union[LogLevel, str] = LogLevel.INFO):
        self._address = None
        self._closed = False
        self._lock = threading.Lock()
        self._free = lib.picket_context_free
        self._listeners = _Listeners(progress, log)
        chosen = _library.stamped('picket_context_options_init')
        chosen.log_level = LogLevel.of(log_level)
        chosen.progress = self._listeners.ask
        if log is not None:
            chosen.log = self._listeners.take
        out = ctypes.c_void_p()
        status = lib.picket_context_create(ctypes.byref(chosen), ctypes.byref(out))
        if status != Status.OK:
            raise error(status, 'the context could not be made')
        self._address = out.value

    @property
    def progress(self) -> Optional[ProgressCallable]:
        """The progress callable, or None."""
        return self._listeners.progress

    @progress.setter
    def progress(self, progress):
        self._listeners.progress = progress

    @property
    def message(self) -> str:
        """One sentence about the last failure; '' when nothing failed."""
        return text(lib.picket_context_message(self._open()))

    @property
    def closed(self) -> bool:
        return self._closed

    def close(self) -> None:
        """Lets go of the context; a second time does nothing."""
        with self._turn():
            if not self._closed:
                self._closed = True
                self._free(self._address)

    def __enter__(self):
        self._open()
        return self

    def __exit__(self, *_):
        self.close()

    def __del__(self):
        if getattr(self, '_address', None) and not self._closed:
            self._closed = True
            self._free(self._address)

    def __repr__(self):
        return f'<picket.Context{" (closed)" if self._closed else ""}>'

    # --- For the classes of this package.

    def _open(self):
        """The address, for what begins with the context itself."""
        if self._closed:
            raise ClosedError('the context is closed', Status.ERROR_ARGUMENT)
        return self._address

    @contextlib.contextmanager
    def _turn(self):
        if not self._lock.acquire(blocking=False):
            raise BusyError('the context is in use by another call', Status.ERROR_BUSY)
        try:
            yield
        finally:
            self._lock.release()

    def _call(self, function, *arguments, progress=None, wrap=None, take=None):
        """Makes a call and raises what its status says. Objects stand for their addresses, which are taken only
        when it is this call's turn, so that none is freed meanwhile. With `wrap` the last argument is where the
        call puts an object, and wrap(its address) is returned; a call that fails may leave a partial one. What
        the call only lends is copied by take(), whose answer is returned, while it is still this call's turn."""
        out = ctypes.c_void_p()
        with self._turn():
            given = [a._address if isinstance(a, Owned) else a for a in arguments]
            if wrap:
                given.append(ctypes.byref(out))
            with self._listening(progress) as listeners, _Interrupts(listeners) as interrupts:
                status = function(*given)
            failure, listeners.failure = listeners.failure, None
            message = text(lib.picket_context_message(self._address)) if status != Status.OK else ''
            taken = take() if take and status == Status.OK else None
        made = wrap(out.value) if out.value else None
        cause = None
        if status != Status.OK:
            cause = error(status, message, made)
        elif failure is not None or interrupts.seen:
            cause = error(Status.ERROR_STOPPED, 'stopped when the work was done', made)
        if failure is not None:
            raise failure from cause
        interrupts.deliver(cause)
        if status != Status.OK:
            raise cause
        return taken if take else made

    @contextlib.contextmanager
    def _listening(self, progress):
        listeners, usual = self._listeners, self._listeners.progress
        listeners.interrupted, listeners.failure = False, None
        listeners.progress = usual if progress is None else progress
        try:
            yield listeners
        finally:
            listeners.progress = usual


class _Interrupts:
    """Ctrl-C during a call. Python would raise KeyboardInterrupt on entry to the callback, before any `try` of it,
    and ctypes would drop it; so the signal is only noted, the work is stopped, and the program's own handler runs
    once the call has returned. Signals reach the main thread only."""

    def __init__(self, listeners):
        self.listeners = listeners
        self.usual = self.seen = None

    def _note(self, number, frame):
        self.seen = (number, frame)
        self.listeners.interrupted = True

    def __enter__(self):
        if threading.current_thread() is threading.main_thread() and callable(signal.getsignal(signal.SIGINT)):
            with contextlib.suppress(ValueError):   # not the main interpreter
                self.usual = signal.signal(signal.SIGINT, self._note)
        return self

    def __exit__(self, *_):
        if self.usual is not None:
            signal.signal(signal.SIGINT, self.usual)

    def deliver(self, cause):
        """Runs the program's handler; what it raises says where the finished part is (`__cause__.partial`)."""
        if self.seen is not None:
            try:
                self.usual(*self.seen)
            except BaseException as raised:
                raise raised from cause


class Owned:
    """An object of the library that is freed with this one."""

    _kind = 'object'

    def __init__(self, context: Context, pointer, free):
        self.context = context
        self._pointer = pointer
        self._free = free

    @property
    def _address(self):
        if self._pointer is None:
            raise ClosedError(f'the {self._kind} is closed', Status.ERROR_ARGUMENT)
        return self._pointer

    @property
    def closed(self) -> bool:
        return self._pointer is None

    def close(self) -> None:
        """Frees it now; a second time does nothing. Otherwise it is freed with its last name."""
        with self.context._turn():
            pointer, self._pointer = self._pointer, None
            if pointer is not None:
                self._free(pointer)

    def __enter__(self):
        self._address
        return self

    def __exit__(self, *_):
        self.close()

    def __del__(self):
        pointer, self._pointer = getattr(self, '_pointer', None), None
        if pointer is not None:
            self._free(pointer)
