/* The inside of a context, for the files of this room only. */
#ifndef PK_BASE_CONTEXT_PRIVATE_H
#define PK_BASE_CONTEXT_PRIVATE_H

#include <stdatomic.h>

#include <picket/context.h>

enum { PK_MESSAGE_CAPACITY = 1024 };

struct picket_context {
  picket_context_options options;
  atomic_int holds; /* the creator's and one per living object */
  atomic_flag busy; /* set while a public call is inside */
  char message[PK_MESSAGE_CAPACITY];
};

#endif
