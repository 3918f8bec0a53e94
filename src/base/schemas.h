/* XML Schemas built into the library (made from tubedata by the Makefile).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_SCHEMAS_H
#define BASE_SCHEMAS_H

extern const char plw_schema_tube[];
extern const char plw_schema_stage[];

#endif
