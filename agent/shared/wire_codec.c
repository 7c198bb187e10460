/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Walks the tables of wire.c: struct to JSON object and back. */
#include <assert.h>
#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "text.h"
#include "wire.h"

static json_t *encode_members(const struct wire_member *members,
    const void *body);
static int decode_members(const struct wire_member *members, bool strict,
    bool with_type, const json_t *object, void *body, struct error *err);

static json_t *
encode_tokens(const char *tokens, size_t count)
{
	json_t *array = json_array();

	for (size_t i = 0; i < count; i++)
		(void)json_array_append_new(array,
		    json_string(tokens + i * WIRE_TOKEN_SIZE));
	return array;
}

static json_t *
encode_u64(const struct wire_member *m, uint64_t value)
{
	if (m->nullable && value > WIRE_INTEGER_MAX)
		return json_null();
	if (value > WIRE_INTEGER_MAX)
		value = WIRE_INTEGER_MAX;
	return json_integer((json_int_t)value);
}

/* What the host or a cut made of a text need not be UTF-8, JSON must be. */
static json_t *
encode_text(const char *text)
{
	json_t *string = json_string(text);
	char ascii[WIRE_MEMBERS_SIZE];
	size_t i;

	if (string != NULL)
		return string;
	for (i = 0; text[i] != '\0' && i + 1 < sizeof(ascii); i++)
		ascii[i] = (unsigned char)text[i] < 0x80 ? text[i] : '?';
	ascii[i] = '\0';
	return json_string(ascii);
}

static json_t *
encode_value(const struct wire_member *m, const char *at, const char *body)
{
	uint64_t number;
	size_t count;
	int name;
	bool yes;

	switch (m->kind) {
	case WIRE_U64:
		memcpy(&number, at, sizeof(number));
		return encode_u64(m, number);
	case WIRE_BOOL:
		memcpy(&yes, at, sizeof(yes));
		return json_boolean(yes);
	case WIRE_TEXT:
		return encode_text(at);
	case WIRE_NAME:
		memcpy(&name, at, sizeof(name));
		return json_string(m->names[name]);
	case WIRE_TOKENS:
		memcpy(&count, body + m->count_offset, sizeof(count));
		return encode_tokens(at, count);
	case WIRE_OBJECT:
		return encode_members(m->members, at);
	}
	return NULL;
}

static json_t *
encode_members(const struct wire_member *members, const void *body)
{
	json_t *object = json_object();

	for (const struct wire_member *m = members; m->name != NULL; m++)
		(void)json_object_set_new(object, m->name, encode_value(m,
		    (const char *)body + m->offset, body));
	return object;
}

json_t *
wire_encode(enum wire_type type, const void *body)
{
	const struct wire_member *members = wire_members(type);
	json_t *message;

	assert(members != NULL);
	message = encode_members(members, body);
	(void)json_object_set_new(message, "type",
	    json_string(wire_type_name(type)));
	return message;
}

static int
bad_member(const struct wire_member *m, const char *allowed, struct error *err)
{
	return error_set(err, ERROR_PEER, "member '%s' is not %s", m->name,
	    allowed);
}

static int
decode_u64(const struct wire_member *m, const json_t *value, char *at,
    struct error *err)
{
	uint64_t max = m->max != 0 ? m->max : WIRE_INTEGER_MAX;
	uint64_t number = UNKNOWN_U64;

	if (!(m->nullable && json_is_null(value))) {
		if (!json_is_integer(value) || json_integer_value(value) < 0)
			return bad_member(m, "a whole number", err);
		number = (uint64_t)json_integer_value(value);
		if (number < m->min || number > max)
			return error_set(err, ERROR_PEER, "member '%s': "
			    "found %" JSON_INTEGER_FORMAT ", allowed %"
			    JSON_INTEGER_FORMAT " to %" JSON_INTEGER_FORMAT,
			    m->name, json_integer_value(value),
			    (json_int_t)m->min, (json_int_t)max);
	}
	memcpy(at, &number, sizeof(number));
	return 0;
}

static int
decode_text(const struct wire_member *m, const json_t *value, char *at,
    struct error *err)
{
	const char *text = json_string_value(value);

	if (text == NULL || json_string_length(value) != strlen(text))
		return bad_member(m, "a text without NUL", err);
	if (strlen(text) >= m->size)
		return bad_member(m, "short enough", err);
	memset(at, 0, m->size);
	memcpy(at, text, strlen(text));
	return 0;
}

static int
decode_name(const struct wire_member *m, const json_t *value, char *at,
    struct error *err)
{
	const char *text = json_string_value(value);

	for (int i = 0; text != NULL && m->names[i] != NULL; i++)
		if (strcmp(m->names[i], text) == 0) {
			memcpy(at, &i, sizeof(i));
			return 0;
		}
	return bad_member(m, "one of the known names", err);
}

static bool
is_token(const json_t *value)
{
	const char *text = json_string_value(value);

	return text != NULL &&
	    json_string_length(value) == WIRE_TOKEN_SIZE - 1 &&
	    strspn(text, "0123456789abcdef") == WIRE_TOKEN_SIZE - 1;
}

static int
decode_tokens(const struct wire_member *m, const json_t *value, char *at,
    char *body, struct error *err)
{
	size_t count = json_array_size(value);

	if (!json_is_array(value) || count > TRIAL_STREAMS_MAX)
		return bad_member(m, "a list of at most 256 tokens", err);
	for (size_t i = 0; i < count; i++) {
		const json_t *item = json_array_get(value, i);

		if (!is_token(item))
			return bad_member(m, "a list of 32 hex digits", err);
		memcpy(at + i * WIRE_TOKEN_SIZE, json_string_value(item),
		    WIRE_TOKEN_SIZE);
	}
	memcpy(body + m->count_offset, &count, sizeof(count));
	return 0;
}

static int
decode_value(const struct wire_member *m, bool strict, const json_t *value,
    char *body, struct error *err)
{
	char *at = body + m->offset;
	bool yes = json_is_true(value);

	switch (m->kind) {
	case WIRE_U64:
		return decode_u64(m, value, at, err);
	case WIRE_BOOL:
		if (!json_is_boolean(value))
			return bad_member(m, "true or false", err);
		memcpy(at, &yes, sizeof(yes));
		return 0;
	case WIRE_TEXT:
		return decode_text(m, value, at, err);
	case WIRE_NAME:
		return decode_name(m, value, at, err);
	case WIRE_TOKENS:
		return decode_tokens(m, value, at, body, err);
	case WIRE_OBJECT:
		if (!json_is_object(value))
			return bad_member(m, "an object", err);
		return decode_members(m->members, strict, false, value, at,
		    err);
	}
	return -1;
}

static const struct wire_member *
find_member(const struct wire_member *members, const char *name)
{
	for (const struct wire_member *m = members; m->name != NULL; m++)
		if (strcmp(m->name, name) == 0)
			return m;
	return NULL;
}

static int
decode_members(const struct wire_member *members, bool strict,
    bool with_type, const json_t *object, void *body, struct error *err)
{
	char quoted[TEXT_QUOTE_SIZE];
	const char *key;
	json_t *value;

	for (const struct wire_member *m = members; m->name != NULL; m++) {
		value = json_object_get(object, m->name);
		if (value == NULL && m->optional)
			continue;
		if (value == NULL)
			return error_set(err, ERROR_PEER,
			    "member '%s' is missing", m->name);
		if (decode_value(m, strict, value, body, err) == -1)
			return -1;
	}
	if (!strict)
		return 0;
	json_object_foreach((json_t *)(uintptr_t)object, key, value)
		if (find_member(members, key) == NULL &&
		    !(with_type && strcmp(key, "type") == 0))
			return error_set(err, ERROR_PEER,
			    "member '%s' is unknown", text_quote(key, quoted,
			    sizeof(quoted)));
	return 0;
}

int
wire_decode(enum wire_type type, const json_t *message, void *body,
    struct error *err)
{
	const struct wire_member *members = wire_members(type);
	size_t size = wire_size(type);
	void *decoded;
	int rc;

	assert(members != NULL);
	decoded = calloc(1, size != 0 ? size : 1);
	if (decoded == NULL)
		return error_errno(err, ERROR_INTERNAL, "message '%s'",
		    wire_type_name(type));
	rc = decode_members(members, wire_is_request(type), true, message,
	    decoded, err);
	if (rc == 0 && size != 0)
		memcpy(body, decoded, size);
	else if (rc == -1)
		error_wrap(err, "message '%s'", wire_type_name(type));
	free(decoded);
	return rc;
}
