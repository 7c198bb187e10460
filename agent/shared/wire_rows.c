/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rows frames: arrays in the order of the columns. */
#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "wire.h"

static const char *const table_names[WIRE_TABLES + 1] = {
	[WIRE_TABLE_INTERVAL] = "interval",
	[WIRE_TABLE_STREAM] = "stream",
	[WIRE_TABLE_WORKER] = "worker",
};

/* All kinds of row are structs of nothing but uint64_t, in column order. */
#define SAMPLE_NAME(name, offset, bytes) #name,
static const char *const interval_columns[] = {
	"number", "end_ns", "bytes", "cpu_ns", "steal_ns"
};
static const char *const stream_columns[] = {
	"number", "stream", "bytes", TCP_SAMPLE_FIELDS(SAMPLE_NAME)
};
static const char *const worker_columns[] = {
	"number", "worker", "cpu_ns"
};
#define INTERVAL_COLUMNS (sizeof(interval_columns) / sizeof(char *))
#define STREAM_COLUMNS (sizeof(stream_columns) / sizeof(char *))
#define WORKER_COLUMNS (sizeof(worker_columns) / sizeof(char *))
_Static_assert(sizeof(struct interval_row) ==
    INTERVAL_COLUMNS * sizeof(uint64_t), "a column for each member");
_Static_assert(sizeof(struct stream_row) ==
    STREAM_COLUMNS * sizeof(uint64_t), "a column for each member");
_Static_assert(sizeof(struct worker_row) ==
    WORKER_COLUMNS * sizeof(uint64_t), "a column for each member");

static const struct table {
	const char *const *columns;
	size_t count;
	size_t known;		/* so many at the start are never null */
} tables[WIRE_TABLES] = {
	[WIRE_TABLE_INTERVAL] = { interval_columns, INTERVAL_COLUMNS, 4 },
	[WIRE_TABLE_STREAM] = { stream_columns, STREAM_COLUMNS, 3 },
	[WIRE_TABLE_WORKER] = { worker_columns, WORKER_COLUMNS, 3 },
};

static json_t *
encode_rows(uint64_t number, enum wire_table table, enum direction direction,
    bool with_columns, const void *rows, size_t count)
{
	const struct table *t = &tables[table];
	json_t *message = json_object();
	json_t *array = json_array();

	(void)json_object_set_new(message, "type", json_string("rows"));
	(void)json_object_set_new(message, "number",
	    json_integer((json_int_t)number));
	(void)json_object_set_new(message, "table",
	    json_string(table_names[table]));
	(void)json_object_set_new(message, "direction",
	    json_string(direction_name(direction)));
	if (with_columns) {
		json_t *columns = json_array();

		for (size_t i = 0; i < t->count; i++)
			(void)json_array_append_new(columns,
			    json_string(t->columns[i]));
		(void)json_object_set_new(message, "columns", columns);
	}
	for (size_t r = 0; r < count; r++) {
		json_t *row = json_array();

		for (size_t i = 0; i < t->count; i++) {
			uint64_t value;

			memcpy(&value, (const char *)rows +
			    (r * t->count + i) * sizeof(value), sizeof(value));
			(void)json_array_append_new(row,
			    value > WIRE_INTEGER_MAX ? json_null() :
			    json_integer((json_int_t)value));
		}
		(void)json_array_append_new(array, row);
	}
	(void)json_object_set_new(message, "rows", array);
	return message;
}

json_t *
wire_encode_interval_rows(uint64_t number, enum direction direction,
    bool with_columns, const struct interval_row rows[], size_t count)
{
	return encode_rows(number, WIRE_TABLE_INTERVAL, direction,
	    with_columns, rows, count);
}

json_t *
wire_encode_stream_rows(uint64_t number, enum direction direction,
    bool with_columns, const struct stream_row rows[], size_t count)
{
	return encode_rows(number, WIRE_TABLE_STREAM, direction,
	    with_columns, rows, count);
}

json_t *
wire_encode_worker_rows(uint64_t number, enum direction direction,
    bool with_columns, const struct worker_row rows[], size_t count)
{
	return encode_rows(number, WIRE_TABLE_WORKER, direction,
	    with_columns, rows, count);
}

/* A newer peer may add columns at the end; those are ignored. */
static int
decode_row(const struct table *t, const json_t *row, void *out,
    struct error *err)
{
	if (!json_is_array(row) || json_array_size(row) < t->count)
		return error_set(err, ERROR_PEER,
		    "a row of %zu values, at least %zu expected",
		    json_array_size(row), t->count);
	for (size_t i = 0; i < t->count; i++) {
		const json_t *item = json_array_get(row, i);
		uint64_t value = UNKNOWN_U64;

		if (json_is_integer(item) && json_integer_value(item) >= 0 &&
		    (uint64_t)json_integer_value(item) <= WIRE_INTEGER_MAX)
			value = (uint64_t)json_integer_value(item);
		else if (!json_is_null(item) || i < t->known)
			return error_set(err, ERROR_PEER,
			    "column '%s' of a row is not a whole number",
			    t->columns[i]);
		memcpy((char *)out + i * sizeof(value), &value,
		    sizeof(value));
	}
	return 0;
}

static int
check_columns(const struct table *t, const json_t *columns, struct error *err)
{
	if (columns == NULL)
		return 0;
	for (size_t i = 0; i < t->count; i++) {
		const char *name =
		    json_string_value(json_array_get(columns, i));

		if (name == NULL || strcmp(name, t->columns[i]) != 0)
			return error_set(err, ERROR_PEER,
			    "column %zu of rows is not '%s'", i + 1,
			    t->columns[i]);
	}
	return 0;
}

static int
decode_head(const json_t *message, struct wire_rows *out, struct error *err)
{
	const char *table = json_string_value(json_object_get(message,
	    "table"));
	const char *direction = json_string_value(json_object_get(message,
	    "direction"));
	const json_t *number = json_object_get(message, "number");

	if (!json_is_integer(number) || json_integer_value(number) < 0 ||
	    (uint64_t)json_integer_value(number) > WIRE_INTEGER_MAX)
		return error_set(err, ERROR_PEER, "rows without a number");
	out->number = (uint64_t)json_integer_value(number);
	if (direction == NULL ||
	    direction_from_name(direction, &out->direction) == -1 ||
	    out->direction == DIRECTION_BOTH)
		return error_set(err, ERROR_PEER, "rows of no direction");
	for (int i = 0; table != NULL && i < WIRE_TABLES; i++)
		if (strcmp(table, table_names[i]) == 0) {
			out->table = (enum wire_table)i;
			return 0;
		}
	return error_set(err, ERROR_PEER, "rows of an unknown table");
}

static void *
row_at(struct wire_rows *rows, size_t i)
{
	switch (rows->table) {
	case WIRE_TABLE_INTERVAL:
		return &rows->interval[i];
	case WIRE_TABLE_STREAM:
		return &rows->stream[i];
	case WIRE_TABLE_WORKER:
		return &rows->worker[i];
	case WIRE_TABLES:
		break;
	}
	return NULL;
}

int
wire_decode_rows(const json_t *message, struct wire_rows *out,
    struct error *err)
{
	const json_t *rows = json_object_get(message, "rows");
	const struct table *t;

	if (decode_head(message, out, err) == -1)
		return -1;
	t = &tables[out->table];
	if (check_columns(t, json_object_get(message, "columns"), err) == -1)
		return -1;
	if (!json_is_array(rows))
		return error_set(err, ERROR_PEER, "rows without rows");
	out->count = json_array_size(rows);
	if (out->count > WIRE_ROWS_MAX)
		return error_set(err, ERROR_PEER,
		    "rows: found %zu, allowed at most %d", out->count,
		    WIRE_ROWS_MAX);
	for (size_t i = 0; i < out->count; i++)
		if (decode_row(t, json_array_get(rows, i), row_at(out, i),
		    err) == -1)
			return -1;
	return 0;
}

char *
wire_rows_text(const json_t *message)
{
	return json_dumps(json_object_get(message, "rows"), JSON_COMPACT);
}
