/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The JSON Schema of the documents, as it stands in schema/ (a test holds that file equal
 * to what src/model/schema.c makes of the field tables). */
#include "ohmen/ohmen.h"

extern const char document_schema_text[];

const char *ohmen_document_schema(void)
{
    return document_schema_text;
}
